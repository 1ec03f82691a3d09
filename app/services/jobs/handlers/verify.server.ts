import { runVerification } from "../../editions/verify-edition.server.ts";
import { verifyJob } from "../definitions/verify.ts";
import type { JobRun } from "../job-run.ts";

/** Recomputes an edition, compares, keeps the outcome. */
export function runVerifyJob(run: JobRun): Promise<void> {
  return runVerification(verifyJob.payload.parse(run.payload), run);
}
