import { and, asc, count, eq, isNull, min, sql } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { jobs } from "../../db/schema.server.ts";
import { jobState } from "./state.server.ts";

/** Seconds a claim is good for without a sign of life; a dead process's jobs are taken over after that. */
export const LEASE_SECONDS = 15;

/** By the database's clock: processes on several machines share one queue. */
export const leaseEnd = sql`utc_timestamp(3) + interval ${sql.raw(String(LEASE_SECONDS))} second`;

export interface ClaimedJob {
  id: string;
  definition: string;
  version: number;
  payload: unknown;
  teamId: string;
  attempts: number;
  createdAt: Date;
}

interface Party {
  teamId: string;
  userId: string | null;
}

const personKey = ({ teamId, userId }: Party) => `${teamId} ${userId}`;

/**
 * Who waits, in the order in which they are served: the team with fewest running, of equals the one that was served
 * longest ago, in it the person by the same rule, and the oldest last. With one thread nothing runs when the next is
 * claimed: turns are what keeps five jobs of one from standing before one of another.
 */
async function waitingParties(): Promise<Party[]> {
  const party = { teamId: jobs.teamId, userId: jobs.userId };
  const [waiting, running] = await Promise.all([
    db
      .select({ ...party, oldest: min(jobs.createdAt).mapWith(String) })
      .from(jobs)
      .where(eq(jobs.state, "queued"))
      .groupBy(jobs.teamId, jobs.userId),
    db
      .select({ ...party, n: count() })
      .from(jobs)
      .where(eq(jobs.state, "running"))
      .groupBy(jobs.teamId, jobs.userId),
  ]);
  const ofTeam = new Map<string, number>();
  const ofUser = new Map<string | null, number>();
  for (const { teamId, userId, n } of running) {
    ofTeam.set(teamId, (ofTeam.get(teamId) ?? 0) + n);
    ofUser.set(userId, (ofUser.get(userId) ?? 0) + n);
  }
  const load = (map: Map<string | null, number>, key: string | null) => map.get(key) ?? 0;
  const { turns } = jobState();
  keepTurns([...waiting, ...running]);
  const turn = (key: string) => turns.get(key) ?? 0;
  return waiting.sort(
    (a, b) =>
      load(ofTeam, a.teamId) - load(ofTeam, b.teamId) ||
      turn(a.teamId) - turn(b.teamId) ||
      load(ofUser, a.userId) - load(ofUser, b.userId) ||
      turn(personKey(a)) - turn(personKey(b)) ||
      a.oldest.localeCompare(b.oldest),
  );
}

/** Forgets the turns of whoever neither waits nor is served. */
function keepTurns(parties: readonly Party[]): void {
  const { turns } = jobState();
  const present = new Set(parties.flatMap((party) => [party.teamId, personKey(party)]));
  for (const key of turns.keys()) if (!present.has(key)) turns.delete(key);
}

function noteTurn(party: Party): void {
  const { turns } = jobState();
  const next = Math.max(0, ...turns.values()) + 1;
  turns.set(party.teamId, next).set(personKey(party), next);
}

async function claimOf(party: Party, holder: string): Promise<ClaimedJob | null> {
  const ofUser = party.userId === null ? isNull(jobs.userId) : eq(jobs.userId, party.userId);
  return inTransaction(
    async (tx) => {
      const rows = await tx
        .select()
        .from(jobs)
        .where(and(eq(jobs.state, "queued"), eq(jobs.teamId, party.teamId), ofUser))
        .orderBy(asc(jobs.createdAt), asc(jobs.id))
        .limit(1)
        .for("update", { skipLocked: true });
      const job = rows[0];
      if (job === undefined) return null;
      const attempts = job.attempts + 1;
      await tx
        .update(jobs)
        .set({ state: "running", holder, attempts, progress: 0, startedAt: new Date(), leaseUntil: leaseEnd })
        .where(eq(jobs.id, job.id));
      return { ...job, attempts };
    },
    { isolation: "read committed" },
  );
}

/**
 * Takes the next job for this process, in turns between teams and within a team between people; null when none waits.
 * Two processes never get the same one: rows that another is claiming are passed over.
 */
export async function claimJob(holder: string): Promise<ClaimedJob | null> {
  for (const party of await waitingParties()) {
    const job = await claimOf(party, holder);
    if (job === null) continue;
    noteTurn(party);
    return job;
  }
  return null;
}
