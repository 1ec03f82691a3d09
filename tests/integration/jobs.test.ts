import { eq, sql } from "drizzle-orm";
import { afterEach, beforeAll, describe, expect, it, vi } from "vitest";
import { db, inTransaction } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { jobs, sifts } from "~/db/schema.server";
import { claimJob } from "~/services/jobs/claim-job.server";
import { finishJob, JobLost, recoverJobs, returnJob } from "~/services/jobs/finish-job.server";
import { startJobs } from "~/services/jobs/run-jobs.server";
import { shutDownJobs } from "~/services/jobs/shutdown.server";
import { jobState } from "~/services/jobs/state.server";
import { buildWorker } from "../../scripts/build-worker.mjs";
import { makeTeam } from "../factories/people";
import { frame, makeLab, post, reference, takenIn } from "../factories/upload";
import { call } from "../setup/app";

/** Enough for a sift that lasts until it is disturbed. */
const FRAMES = 6_000;

const LONG_AGO = new Date(Date.now() - 3_600_000);

/** A row of the queue that no handler knows: for what happens around the work. */
async function makeJob(values: Partial<typeof jobs.$inferInsert> & { teamId: string }): Promise<string> {
  const id = newId();
  await db.insert(jobs).values({
    id,
    definition: "test",
    version: 1,
    payload: {},
    state: "queued",
    createdAt: new Date(),
    ...values,
  });
  return id;
}

const row = async (id: string) => (await db.select().from(jobs).where(eq(jobs.id, id)))[0];

describe("the queue", () => {
  afterEach(() => db.delete(jobs));

  it("gives a job to one of two processes that claim at the same moment (F08)", async () => {
    const { id: teamId } = await makeTeam();
    const wanted = new Set([await makeJob({ teamId }), await makeJob({ teamId })]);
    const claimed = await Promise.all(["a", "b", "c", "d"].map((holder) => claimJob(holder)));
    const ids = claimed.flatMap((job) => (job === null ? [] : [job.id]));
    expect(new Set(ids)).toEqual(wanted);
    expect(ids).toHaveLength(2);
  });

  it("serves the team with fewest running jobs first, then the person, then the oldest", async () => {
    const [busy, idle] = [await makeTeam(), await makeTeam()];
    const at = (second: number) => new Date(2026, 0, 1, 0, 0, second);
    const [one, two] = [newId(), newId()];
    const first = await makeJob({ teamId: busy.id, userId: one, createdAt: at(1) });
    const second = await makeJob({ teamId: busy.id, userId: one, createdAt: at(2) });
    const colleague = await makeJob({ teamId: busy.id, userId: two, createdAt: at(3) });
    const stranger = await makeJob({ teamId: idle.id, userId: null, createdAt: at(4) });
    const order: (string | undefined)[] = [];
    for (let k = 0; k < 5; k++) order.push((await claimJob("me"))?.id);
    expect(order).toEqual([first, stranger, colleague, second, undefined]);
  });

  it("goes round between teams and people where one job runs at a time", async () => {
    const [busy, idle] = [await makeTeam(), await makeTeam()];
    const at = (second: number) => new Date(2026, 0, 1, 0, 0, second);
    const [one, two] = [newId(), newId()];
    const five: string[] = [];
    for (let k = 1; k <= 5; k++) five.push(await makeJob({ teamId: busy.id, userId: one, createdAt: at(k) }));
    const order: (string | undefined)[] = [];
    const serve = async () => {
      const job = await claimJob("me");
      order.push(job?.id);
      if (job) await inTransaction((tx) => finishJob(tx, job.id, "me"));
    };
    await serve();
    const colleague = await makeJob({ teamId: busy.id, userId: two, createdAt: at(6) });
    const stranger = await makeJob({ teamId: idle.id, userId: newId(), createdAt: at(7) });
    for (let k = 0; k < 7; k++) await serve();
    const [first, ...others] = five;
    expect(order).toEqual([first, stranger, colleague, ...others, undefined]);
  });

  it("takes a dead process's job back once its lease is over, and gives up after three tries (F08)", async () => {
    const { id: teamId } = await makeTeam();
    const dead = { teamId, state: "running" as const, holder: "gone" };
    const alive = await makeJob({ ...dead, attempts: 1, leaseUntil: new Date(Date.now() + 60_000) });
    const lost = await makeJob({ ...dead, attempts: 1, leaseUntil: LONG_AGO });
    const hopeless = await makeJob({ ...dead, attempts: 3, leaseUntil: LONG_AGO });
    await recoverJobs();
    expect(await row(alive)).toMatchObject({ state: "running", holder: "gone" });
    expect(await row(lost)).toMatchObject({ state: "queued", holder: null, attempts: 1 });
    expect(await row(hopeless)).toMatchObject({ state: "failed" });
    expect((await row(hopeless))?.error).toContain("three times");
  });

  it("lets only its holder finish or return a job", async () => {
    const { id: teamId } = await makeTeam();
    const id = await makeJob({ teamId });
    expect((await claimJob("me"))?.id).toBe(id);
    await expect(inTransaction((tx) => finishJob(tx, id, "somebody else"))).rejects.toThrow(JobLost);
    await returnJob(id, "somebody else");
    expect((await row(id))?.state).toBe("running");
    await inTransaction((tx) => finishJob(tx, id, "me"));
    expect(await row(id)).toMatchObject({ state: "done", progress: 1 });
    await expect(inTransaction((tx) => finishJob(tx, id, "me"))).rejects.toThrow(JobLost);
  });

  it("repeats a transaction that the database ended for a deadlock", async () => {
    const { id: teamId } = await makeTeam();
    const [a, b] = [await makeJob({ teamId }), await makeJob({ teamId })];
    let attempts = 0;
    let meet = () => {};
    const met = new Promise<void>((resolve) => {
      meet = resolve;
    });
    let waiting = 0;
    const touch = (first: string, second: string) =>
      inTransaction(async (tx) => {
        attempts += 1;
        const mark = (id: string) =>
          tx
            .update(jobs)
            .set({ progress: sql`${jobs.progress} + 0.25` })
            .where(eq(jobs.id, id));
        await mark(first);
        waiting += 1;
        if (waiting === 2) meet();
        await met;
        await mark(second);
      });
    await Promise.all([touch(a, b), touch(b, a)]);
    expect(attempts).toBeGreaterThan(2);
    expect([(await row(a))?.progress, (await row(b))?.progress]).toEqual([0.5, 0.5]);
  });
});

describe("a sift that runs", () => {
  let token: string;
  let ensembleId: string;
  // Just under the distance of two shaken frames of one shape: bounds decide few pairs, and nearly every frame is kept.
  let tolerance = 0.05;

  beforeAll(async () => {
    await buildWorker();
    ({ token } = await makeLab());
    const taken = await takenIn(token, [{ name: "noise.xyz", content: noisy(FRAMES) }]);
    ensembleId = taken.id;
    await db.delete(jobs);
    await db.delete(sifts);
  });
  afterEach(async () => {
    await shutDownJobs();
    await db.delete(sifts);
    await db.delete(jobs);
  });

  /** Asks for millions of comparisons and waits until a thread works on them. */
  async function running() {
    tolerance += 0.001;
    const asked = await post(token, `/ensembles/${ensembleId}/sifts`, {
      level: null,
      rmsdTolerance: tolerance,
      atoms: "all",
    });
    const { id } = await asked.json();
    const jobId = (await db.select().from(sifts).where(eq(sifts.id, id)))[0]?.jobId ?? "";
    await vi.waitFor(() => expect(jobState().running.get(jobId)?.progress ?? 0).toBeGreaterThan(0), 20_000);
    return { id, jobId };
  }

  /** The answer once the sift has ended, however long a busy machine takes. */
  async function ended(id: string) {
    for (;;) {
      const answer = await (await call(`/api/v1/sifts/${id}?wait=60`, { token })).json();
      if (answer.status !== "queued" && answer.status !== "running") return answer;
    }
  }

  it("is cancelled: the thread stops, the answer says so, nothing is stored (security E10)", async () => {
    await startJobs();
    const { id, jobId } = await running();
    const { progress } = await (await call(`/api/v1/sifts/${id}`, { token })).json();
    expect(progress).toBeGreaterThan(0);
    const waiting = call(`/api/v1/sifts/${id}?wait=60`, { token });
    const answer = await call(`/api/v1/sifts/${id}`, { method: "DELETE", token });
    expect(answer.status).toBe(202);
    const cancelled = await answer.json();
    expect(cancelled).toMatchObject({ id, status: "cancelled" });
    // What was told once is not taken back.
    expect(cancelled.progress).toBeGreaterThanOrEqual(progress);
    expect((await (await call(`/api/v1/sifts/${id}`, { token })).json()).progress).toBe(cancelled.progress);
    expect(await (await waiting).json()).toMatchObject({ status: "cancelled", result: null });
    await vi.waitFor(() => expect(jobState().running.size).toBe(0), 5_000);
    expect(await row(jobId)).toMatchObject({ state: "cancelled" });
    expect((await call(`/api/v1/sifts/${id}`, { method: "DELETE", token })).status).toBe(202);
  });

  it("goes back to the queue at a shutdown, which answers who waits; the next start computes it (F03)", async () => {
    await startJobs();
    const { id, jobId } = await running();
    const waiting = call(`/api/v1/sifts/${id}?wait=60`, { token });
    await shutDownJobs();
    expect((await (await waiting).json()).status).toMatch(/queued|running/);
    expect(await row(jobId)).toMatchObject({ state: "queued", holder: null, attempts: 0, progress: 0 });
    await startJobs();
    const done = await ended(id);
    expect(done).toMatchObject({ status: "done", progress: 1 });
    expect(done.result.kept.length + done.result.dropped.length).toBe(FRAMES);
  }, 240_000);

  it("is begun again when its thread is lost", async () => {
    await startJobs();
    const { id, jobId } = await running();
    jobState().running.get(jobId)?.abort.abort();
    expect((await ended(id)).status).toBe("done");
    expect(await row(jobId)).toMatchObject({ attempts: 2 });
  }, 240_000);

  it("stores nothing when another process has taken the job over", async () => {
    await startJobs();
    const { id, jobId } = await running();
    await db.update(jobs).set({ holder: "another" }).where(eq(jobs.id, jobId));
    await vi.waitFor(() => expect(jobState().running.size).toBe(0), 60_000);
    expect(await row(jobId)).toMatchObject({ state: "running", holder: "another" });
    expect((await db.select().from(sifts).where(eq(sifts.id, id)))[0]?.result).toBeNull();
    // The other process dies: its lease ends, and the job is computed here after all.
    await db.update(jobs).set({ leaseUntil: LONG_AGO }).where(eq(jobs.id, jobId));
    await startJobs();
    expect((await ended(id)).status).toBe("done");
  }, 240_000);

  it("of one person's five does not stand before the one of another", async () => {
    const stranger = await makeLab("Another lab");
    const long = await takenIn(token, [{ name: "long.xyz", content: noisy(1_200) }]);
    const short = await takenIn(stranger.token, [{ name: "short.xyz", content: noisy(10) }]);
    await db.delete(sifts);
    await db.delete(jobs);
    const ask = async (by: string, id: string, rmsdTolerance: number) => {
      const recipe = { level: null, rmsdTolerance, atoms: "all" };
      return (await (await post(by, `/ensembles/${id}/sifts`, recipe)).json()).id as string;
    };
    const five: string[] = [];
    for (let k = 0; k < 5; k++) five.push(await ask(token, long.id, 0.04 + 0.001 * k));
    const one = await ask(stranger.token, short.id, 0.1);
    await startJobs();
    const done = await (await call(`/api/v1/sifts/${one}?wait=60`, { token: stranger.token })).json();
    expect(done.status).toBe("done");
    for (const id of five) await call(`/api/v1/sifts/${id}?wait=60`, { token });
    const ended = await db
      .select({ siftId: sifts.id })
      .from(sifts)
      .innerJoin(jobs, eq(jobs.id, sifts.jobId))
      .where(eq(jobs.state, "done"))
      .orderBy(jobs.finishedAt);
    expect(ended).toHaveLength(6);
    expect(ended.findIndex(({ siftId }) => siftId === one)).toBeLessThan(5);
  }, 90_000);

  it("never begins when it was cancelled in the queue, or when the frames changed meanwhile", async () => {
    const ask = async (rmsdTolerance: number) =>
      (await (await post(token, `/ensembles/${ensembleId}/sifts`, { level: null, rmsdTolerance })).json()).id;
    const cancelled = await ask(0.5);
    const outdated = await ask(0.6);
    expect((await call(`/api/v1/sifts/${cancelled}`, { method: "DELETE", token })).status).toBe(202);
    await post(token, `/ensembles/${ensembleId}/frames/1/hold`, { reason: "a test" });
    await startJobs();
    const failed = await (await call(`/api/v1/sifts/${outdated}?wait=30`, { token })).json();
    expect(failed).toMatchObject({ status: "failed", result: null });
    expect(failed.error).toContain("changed before this sift began");
    const still = await (await call(`/api/v1/sifts/${cancelled}?wait=1`, { token })).json();
    expect(still).toMatchObject({ status: "cancelled", progress: 0 });
    await post(token, `/ensembles/${ensembleId}/frames/1/release`, { reason: "a test" });
  });
});

/** Frames of ac-ala-nhme shaken by up to 0.06 Å a coordinate: all different, all the same molecule. */
function noisy(count: number): string {
  let seed = 20261201;
  const random = () => {
    seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0;
    return seed / 2 ** 32;
  };
  const atoms = reference("ensembles/ac-ala-nhme.xyz").toString().split("\n");
  const frames = Array.from({ length: count }, (_, k) => {
    const first = (k % 300) * 24 + 2;
    const lines = atoms.slice(first, first + 22).map((line) => {
      const [symbol, ...xyz] = line.trim().split(/\s+/);
      return [symbol, ...xyz.map((x) => (Number(x) + 0.12 * (random() - 0.5)).toFixed(6))].join(" ");
    });
    return frame("", lines);
  });
  return frames.join("");
}
