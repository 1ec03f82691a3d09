import { matrixJob } from "../definitions/matrix.ts";
import { siftJob } from "../definitions/sift.ts";
import type { JobRun } from "../job-run.ts";
import { runMatrixJob } from "./matrix.server.ts";
import { runSiftJob } from "./sift.server.ts";

/** Who does which kind of job. */
export const handlers: Readonly<Record<string, (run: JobRun) => Promise<void>>> = {
  [siftJob.name]: runSiftJob,
  [matrixJob.name]: runMatrixJob,
};
