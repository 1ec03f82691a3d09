import type { MessagePort } from "node:worker_threads";
import type { Moments } from "../lib/averages/average.ts";
import type { AverageError } from "../lib/averages/uncertainty.ts";
import type { DrawnUncertainty, UncertaintyInput } from "../lib/edition/uncertainty.ts";
import type { FrameMatches } from "../lib/levels/match-frames.ts";
import type { SiftRecipe } from "../lib/recipe/recipe.ts";
import type { SiftResult } from "../lib/recipe/result.ts";
import type { AtomSet } from "../lib/structure.ts";

/**
 * What the server hands to a computing thread. Typed arrays are moved, not copied: the sender's own are empty afterwards.
 */
export interface SiftTask {
  kind: "sift";
  elements: Uint8Array;
  isotopes: Uint16Array;
  bonds: Int32Array;
  atoms: number;
  /** Accepted frames, [frame][atom][xyz] in Å. */
  positions: Float64Array;
  /** Frame number of each row, from 1. */
  numbers: Int32Array;
  /** In their own unit, as written. */
  energies: { values: Float64Array; present: Uint8Array; kcalPerUnit: number } | null;
  recipe: SiftRecipe;
  /** One shared word: anything but 0 asks the thread to stop. */
  cancel: Int32Array;
  port: MessagePort;
}

/** The frames of two files of one molecule, to be matched one to one. */
export interface MatchTask {
  kind: "match";
  elements: Uint8Array;
  isotopes: Uint16Array;
  bonds: Int32Array;
  own: { positions: Float64Array; numbers: Int32Array };
  other: { positions: Float64Array; numbers: Int32Array };
  atoms: SiftRecipe["atoms"];
  symmetry: boolean;
  tolerance: number;
  mirror: boolean;
}

export type MatchAnswer = { kind: "matched"; matches: FrameMatches };

/** What the error of a level makes of averages; the arrays are copied. */
export interface AveragesTask {
  kind: "averages";
  moments: readonly Moments[];
  weighed: { energies: Float64Array; weights: Float64Array; temperatureK: number };
  error: { sigma: number; seed: number };
}

export type AveragesAnswer = { kind: "averaged"; errors: (AverageError | null)[]; draws: number };

/** One thread's share of a pair matrix: all threads take tiles from one counter and write into one buffer. */
export interface MatrixTask {
  kind: "matrix";
  elements: Uint8Array;
  isotopes: Uint16Array;
  bonds: Int32Array;
  atoms: number;
  /** Shared by all threads; frames in the order of the matrix. */
  positions: Float64Array;
  /** What the distances hang on beside the frames. */
  recipe: { atoms: AtomSet; symmetry: boolean; mirror: boolean };
  /** Shared: the packed upper triangle. */
  matrix: Float32Array;
  /** Shared, see `MATRIX_COUNTERS`. */
  counters: Int32Array;
  /** Compiled kernel; null computes the same bytes more slowly. */
  kernel: WebAssembly.Module | null;
  /** As of a sift. */
  cancel: Int32Array;
  port: MessagePort;
}

/** Places in `MatrixTask.counters`: the next tile, pairs done, pairs whose work bound was met. */
export const MATRIX_COUNTERS = { nextTile: 0, pairs: 1, inexact: 2 } as const;

/** The draws of an edition: plain data in, plain data out. */
export interface DrawTask {
  kind: "draw";
  input: UncertaintyInput;
}

export type DrawAnswer = { kind: "drawn"; drawn: DrawnUncertainty };

export type ComputeTask = SiftTask | MatchTask | MatrixTask | AveragesTask | DrawTask;

/** Sent through the task's port, at most ten times a second. */
export interface ProgressMessage {
  progress: number;
  /** Pairs compared so far. */
  pairs: number;
}

export type SiftAnswer = { kind: "done"; result: Omit<SiftResult, "held"> } | { kind: "cancelled" };

export type MatrixAnswer = { kind: "done" } | { kind: "cancelled" };

/** Buffers and ports of a task that change their owner. */
export function transferList(task: SiftTask): (ArrayBuffer | MessagePort)[] {
  const arrays = [task.positions, task.numbers];
  const buffers = arrays.map((array) => array.buffer as ArrayBuffer);
  if (task.energies) {
    buffers.push(task.energies.values.buffer as ArrayBuffer, task.energies.present.buffer as ArrayBuffer);
  }
  return [...buffers, task.port];
}

/** Buffers of a matching that change their owner. */
export function matchBuffers({ own, other }: MatchTask): ArrayBuffer[] {
  return [own, other].flatMap(({ positions, numbers }) => [
    positions.buffer as ArrayBuffer,
    numbers.buffer as ArrayBuffer,
  ]);
}
