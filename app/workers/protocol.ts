import type { MessagePort } from "node:worker_threads";
import type { FrameMatches } from "../lib/levels/match-frames.ts";
import type { SiftRecipe } from "../lib/recipe/recipe.ts";
import type { SiftResult } from "../lib/recipe/result.ts";

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

export type ComputeTask = SiftTask | MatchTask;

/** Sent through the task's port, at most ten times a second. */
export interface ProgressMessage {
  progress: number;
}

export type SiftAnswer = { kind: "done"; result: Omit<SiftResult, "held"> } | { kind: "cancelled" };

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
