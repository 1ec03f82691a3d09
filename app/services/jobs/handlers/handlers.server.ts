import { matrixJob } from "../definitions/matrix.ts";
import { siftJob } from "../definitions/sift.ts";
import { verifyJob } from "../definitions/verify.ts";
import type { JobRun } from "../job-run.ts";
import { runMatrixJob } from "./matrix.server.ts";
import { runSiftJob } from "./sift.server.ts";
import { runVerifyJob } from "./verify.server.ts";

/** Who does which kind of job. */
export const handlers: Readonly<Record<string, (run: JobRun) => Promise<void>>> = {
  [siftJob.name]: runSiftJob,
  [matrixJob.name]: runMatrixJob,
  [verifyJob.name]: runVerifyJob,
};
