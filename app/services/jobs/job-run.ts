/** What a handler is given. It writes its result and finishes the job in one transaction of its own. */
export interface JobRun {
  jobId: string;
  holder: string;
  payload: unknown;
  cancel: Int32Array;
  signal: AbortSignal;
  /** How far it is, with the pairs compared so far. */
  progress(fraction: number, pairs?: number): void;
}

/** The thread saw the word and stopped. */
export class JobStopped extends Error {
  override name = "JobStopped";
}
