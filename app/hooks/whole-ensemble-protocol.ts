import type { NearPair } from "~/lib/align/nearness";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import type { ToleranceCounts } from "~/lib/sift/count-against-tolerance";

/** What the page asks of a thread that holds all accepted frames; of each kind only the newest question is answered. */
export type WholeQuestion =
  /** Bytes of `lib/accepted-data.ts`, and what one of their energy units is in kcal/mol. */
  | { kind: "open"; bytes: ArrayBuffer; kcalPerUnit: number | null }
  /** How many conformers a sift would keep. */
  | { kind: "count"; key: string; recipe: SiftRecipe }
  | { kind: "plateau"; key: string; recipe: SiftRecipe; rmsdTolerances: number[]; energyFactors: number[] }
  /** How near the kept conformers of a sift lie to each other. */
  | { kind: "nearness"; key: string; recipe: SiftRecipe; kept: number[]; most: number };

export interface CountAnswer {
  kind: "count";
  key: string;
  /** What was counted: while a thumb moves, the answer may be older than the question at hand. */
  recipe: SiftRecipe;
  kept: number;
  seconds: number;
}

export interface PlateauAnswer {
  kind: "plateau";
  key: string;
  counts: ToleranceCounts;
  seconds: number;
}

export interface NearnessAnswer {
  kind: "nearness";
  key: string;
  /** By position in the distinct set: position of the nearest other conformer, and Å to it. */
  nearest: Int32Array;
  rmsd: Float64Array;
  exact: Uint8Array;
  over: NearPair[];
  within: number;
  farthestWithin: NearPair | null;
}

export type WholeAnswer =
  | CountAnswer
  | PlateauAnswer
  | NearnessAnswer
  | { kind: "progress"; key: string; done: number; of: number }
  | { kind: "failed"; key: string; message: string };
