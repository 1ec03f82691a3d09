import { and, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { jobs } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { inBackground } from "../background.server.ts";
import { incidentNumber } from "../http.server.ts";
import { log } from "../log.server.ts";
import { LONG_WORK_SECONDS, tellOfJob } from "../mail/long-work.server.ts";
import { askToStop } from "./cancel-job.server.ts";
import { type ClaimedJob, claimJob, leaseEnd } from "./claim-job.server.ts";
import { failJob, JobLost, recoverJobs, returnJob, stillHeld } from "./finish-job.server.ts";
import { handlers } from "./handlers/handlers.server.ts";
import { JobStopped } from "./job-run.ts";
import { threadCount, WorkerLost } from "./pool.server.ts";
import { forgetJobState, jobState } from "./state.server.ts";
import { announceEnd } from "./wait-for-job.server.ts";

/** Several signs of life a lease, so that one that fails does not lose the job. */
const HEARTBEAT_MS = 4_000;

async function settle(job: ClaimedJob, error: unknown): Promise<void> {
  const { holder, stopping } = jobState();
  // Cancelled, taken over, or handed back all at once by the shutdown: the row says so already.
  if (error instanceof JobLost || error instanceof JobStopped || stopping) return;
  if (error instanceof WorkerLost) {
    log.warn({ err: error, jobId: job.id, attempts: job.attempts }, "computing thread lost");
    return returnJob(job.id, holder);
  }
  if (error instanceof DomainError) return failJob(job.id, holder, error.message);
  log.error({ err: error, jobId: job.id }, "job failed");
  const incident = incidentNumber(job.id);
  return failJob(
    job.id,
    holder,
    `The computation failed on the server. If it does again, quote ${incident}.`,
  );
}

function tellWhenLong({ id, createdAt }: ClaimedJob): void {
  if (Date.now() - createdAt.getTime() <= LONG_WORK_SECONDS * 1000) return;
  inBackground("letter of a job", () => tellOfJob(id, jobState().holder));
}

async function run(job: ClaimedJob): Promise<void> {
  const state = jobState();
  const running = {
    cancel: new Int32Array(new SharedArrayBuffer(4)),
    abort: new AbortController(),
    progress: 0,
    pairs: 0,
    ended: Promise.resolve(),
  };
  const work = async () => {
    try {
      const handler = handlers[job.definition];
      if (!handler) throw new Error(`No handler for jobs of the kind ${job.definition}.`);
      await handler({
        jobId: job.id,
        holder: state.holder,
        payload: job.payload,
        cancel: running.cancel,
        signal: running.abort.signal,
        progress: (fraction, pairs = 0) => {
          running.progress = Math.max(running.progress, Math.min(1, fraction));
          running.pairs = Math.max(running.pairs, pairs);
        },
      });
    } catch (error) {
      await settle(job, error).catch((second) =>
        log.error({ err: second, jobId: job.id }, "job not settled"),
      );
    } finally {
      state.running.delete(job.id);
      announceEnd(job.id);
      tellWhenLong(job);
      wakeJobs();
    }
  };
  state.running.set(job.id, running);
  running.ended = work();
}

async function claimAll(): Promise<void> {
  const state = jobState();
  while (!state.stopping && state.running.size < threadCount()) {
    const job = await claimJob(state.holder);
    if (job === null) return;
    await run(job);
  }
}

/** Looks for work now; cheap to call at any time. Jobs asked for in this process start without a delay of polling. */
export function wakeJobs(): void {
  const state = jobState();
  if (state.stopping || state.timer === null) return;
  if (state.claiming) {
    state.claimAgain = true;
    return;
  }
  state.claiming = true;
  claimAll()
    .catch((error) => log.warn({ err: error }, "no job claimed"))
    .finally(() => {
      state.claiming = false;
      if (!state.claimAgain) return;
      state.claimAgain = false;
      wakeJobs();
    });
}

/** Renews the leases of what runs here, and stops what another process cancelled or took over. */
async function showLife(): Promise<void> {
  const { running, holder } = jobState();
  for (const [jobId, job] of running) {
    await db
      .update(jobs)
      .set({ leaseUntil: leaseEnd, progress: job.progress })
      .where(and(eq(jobs.id, jobId), eq(jobs.holder, holder), inArray(jobs.state, ["running"])));
  }
  const held = await stillHeld([...running.keys()], holder);
  for (const [jobId, job] of running) if (!held.has(jobId)) askToStop(job);
}

async function beat(): Promise<void> {
  try {
    await showLife();
    await recoverJobs();
    wakeJobs();
  } catch (error) {
    // The database may be away for a while; the leases outlast a few missed beats, and the next one tries again.
    log.warn({ err: error }, "job heartbeat failed");
  }
}

/** Starts taking jobs in this process; safe to call again. */
export async function startJobs(): Promise<void> {
  if (jobState().stopping) forgetJobState();
  const state = jobState();
  if (state.timer !== null) clearInterval(state.timer);
  state.timer = setInterval(beat, HEARTBEAT_MS);
  state.timer.unref();
  await beat();
}
