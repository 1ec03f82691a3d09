import type { DepthStep } from "./scene.ts";

/**
 * Everything that is laid over the molecules, as plain shapes in pixels: the page draws them as SVG, the picture as
 * canvas. Colours are names of design tokens, so that both follow the theme.
 */
export type Token =
  | "ink"
  | "ink-2"
  | "ink-3"
  | "rule"
  | "edge"
  | "view"
  | "mark"
  | "held"
  | "held-edge"
  | "held-ground"
  | `depth-${DepthStep}`
  | `atom-${"h" | "c" | "n" | "o" | "f" | "p" | "s" | "cl" | "br" | "i" | "other"}`;

export type Mark =
  | {
      kind: "line";
      points: readonly (readonly [number, number])[];
      stroke: Token;
      width: number;
      dash?: readonly [number, number];
    }
  | { kind: "ring"; x: number; y: number; radius: number; stroke: Token; fill: Token | null; width: number }
  | { kind: "box"; x: number; y: number; width: number; height: number; stroke: Token; fill: Token }
  | {
      kind: "text";
      x: number;
      y: number;
      text: string;
      fill: Token;
      anchor: "start" | "middle" | "end";
      strong?: boolean;
      /** Drawn over the molecule: needs a halo of the ground. */
      halo?: boolean;
    };
