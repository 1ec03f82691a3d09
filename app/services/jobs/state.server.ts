import { randomUUID } from "node:crypto";
import type { Piscina } from "piscina";

/** A job that this process computes at the moment. */
export interface RunningJob {
  /** Shared with the thread: anything but 0 asks it to stop. */
  cancel: Int32Array;
  /** Ends the thread itself, for one that does not look at the word. */
  abort: AbortController;
  progress: number;
  /** Pairs compared so far. */
  pairs: number;
  ended: Promise<void>;
}

/** What the job runner of a process keeps; on globalThis, so that development reloads find it again. */
export interface JobState {
  /** Random id of this process, written into every job it holds. */
  readonly holder: string;
  readonly running: Map<string, RunningJob>;
  readonly waiters: Map<string, Set<() => void>>;
  pool: Piscina | null;
  timer: ReturnType<typeof setInterval> | null;
  claiming: boolean;
  claimAgain: boolean;
  stopping: boolean;
  /** When those who wait were last served here, by team and by person; counted, not timed. */
  readonly turns: Map<string, number>;
}

const kept = globalThis as typeof globalThis & { lowlyingJobs?: JobState };

function newState(): JobState {
  return {
    holder: randomUUID(),
    running: new Map(),
    waiters: new Map(),
    pool: null,
    timer: null,
    claiming: false,
    claimAgain: false,
    stopping: false,
    turns: new Map(),
  };
}

/** The one state of this process. */
export function jobState(): JobState {
  kept.lowlyingJobs ??= newState();
  return kept.lowlyingJobs;
}

/** After a shutdown: the next start counts as another process. */
export function forgetJobState(): void {
  kept.lowlyingJobs = undefined;
}

/** How far a job of this process has come; null for one that runs elsewhere or not at all. */
export function progressHere(jobId: string): number | null {
  return jobState().running.get(jobId)?.progress ?? null;
}

/** Pairs that a job of this process has compared; null for one that runs elsewhere or not at all. */
export function pairsHere(jobId: string): number | null {
  return jobState().running.get(jobId)?.pairs ?? null;
}
