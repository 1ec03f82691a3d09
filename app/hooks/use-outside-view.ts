import { useSyncExternalStore } from "react";
import type { TorsionApart } from "~/lib/outside/compare-outside";
import type { Ghost } from "~/lib/view/ghost";

/** What the view beside the comparison with an outside structure shows. Set by the section, drawn beside it. */
export interface OutsideShown {
  /** Conformer in atom colours, reflected where its mirror image is the nearer one. */
  frame: number;
  name: string;
  positions: Float64Array;
  population: number | null;
  ghost: Ghost;
  caption: { strong: string; rest: string };
  torsions: readonly TorsionApart[];
  labels: readonly string[];
}

let shown: OutsideShown | null = null;
const listeners = new Set<() => void>();

export function setOutsideShown(next: OutsideShown | null): void {
  shown = next;
  for (const tell of listeners) tell();
}

export function useOutsideShown(): OutsideShown | null {
  return useSyncExternalStore(
    (tell) => {
      listeners.add(tell);
      return () => listeners.delete(tell);
    },
    () => shown,
    () => null,
  );
}
