import type { DistanceSettings } from "~/lib/workbench/distances";

/** What the page asks of the thread that measures; `id` counts the sets, so that late answers are known as such. */
export type DistanceRequest =
  | { kind: "begin"; id: number; elements: number[]; bonds: number[]; options: DistanceSettings }
  | { kind: "add"; id: number; atoms: number; positions: Float64Array }
  | { kind: "column"; id: number; reference: number };

export interface DistanceAnswer {
  id: number;
  reference: number;
  known: number;
  rmsd: Float64Array;
  exact: Uint8Array;
}
