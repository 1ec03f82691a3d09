import type { Warnings } from "../../lib/api/schemas.ts";
import type { SiftView } from "../../lib/views.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { waitForJob } from "../jobs/wait-for-job.server.ts";
import { findSift, toSiftView } from "./find-sift.server.ts";
import { siftWarnings } from "./standing.server.ts";

/**
 * One sift, after waiting for its end where asked to.
 *
 * @param options.waitSeconds answers when it has ended, at the latest after so many seconds
 * @param options.stateOnly leaves the result out, which may be megabytes
 */
export async function getSift(options: {
  actor: Actor;
  siftId: string;
  waitSeconds?: number;
  stateOnly?: boolean;
  signal?: AbortSignal;
}): Promise<SiftView & { ensemble: string; warnings: Warnings }> {
  const grant = await accessSift(options.actor, "read", options.siftId);
  let sift = await findSift(grant.siftId);
  const wait = options.waitSeconds ?? 0;
  if (wait > 0 && (sift.status === "queued" || sift.status === "running")) {
    await waitForJob(sift.jobId, wait * 1000, options.signal);
    // Access is decided again: a role may have been lost meanwhile.
    await accessSift(options.actor, "read", options.siftId);
    sift = await findSift(grant.siftId);
  }
  const view = await toSiftView(sift, { stateOnly: options.stateOnly ?? false });
  // While it is followed nobody reads them, and they ask for all energies.
  const warnings = options.stateOnly ? [] : await siftWarnings(sift, view.result);
  return { ...view, ensemble: grant.ensembleId, warnings };
}
