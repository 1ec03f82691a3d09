/** What a handler is given. It writes its result and finishes the job in one transaction of its own. */
export interface JobRun {
  jobId: string;
  holder: string;
  payload: unknown;
  cancel: Int32Array;
  signal: AbortSignal;
  progress(fraction: number): void;
}

/** The thread saw the word and stopped. */
export class JobStopped extends Error {
  override name = "JobStopped";
}
