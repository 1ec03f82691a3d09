import { and, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { jobs, members, pairMatrices, sifts, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { takeAttempt } from "../auth/throttle.server.ts";
import { inBackground } from "../background.server.ts";
import { matrixJob } from "../jobs/definitions/matrix.ts";
import { siftJob } from "../jobs/definitions/sift.ts";
import { workLetter } from "./letters.ts";
import { queueMail } from "./queue-mail.server.ts";

/** Work that took longer than this is told of by letter: nobody watches a page for as long. */
export const LONG_WORK_SECONDS = 120;
/** A night of batch jobs must not fill a mailbox. */
const LETTERS_A_DAY = 20;

interface Work {
  teamId: string;
  userId: string | null;
  work: Parameters<typeof workLetter>[0]["work"];
  ended: "done" | "failed";
  seconds: number;
  /** Path of the page that shows it; null where there is none. */
  path: string | null;
}

/** Members only, those who want such letters: who has left the team is told nothing of it any more. */
async function recipientOf({ teamId, userId }: Work): Promise<string | null> {
  if (userId === null) return null;
  const rows = await db
    .select({ email: users.email })
    .from(users)
    .innerJoin(members, and(eq(members.userId, users.id), eq(members.teamId, teamId)))
    .where(and(eq(users.id, userId), isNull(users.disabledAt), eq(users.jobLetters, true)));
  return rows[0]?.email ?? null;
}

async function tell(done: Work): Promise<void> {
  const recipient = await recipientOf(done);
  if (recipient === null) return;
  const subject = done.userId ?? "";
  const wait = await takeAttempt({ kind: "work-letter", subject, limit: LETTERS_A_DAY, seconds: 86_400 });
  if (wait !== null) return;
  const { work, ended, seconds, path } = done;
  const address = path === null ? null : `${env().APP_ORIGIN}${path}`;
  await queueMail(workLetter({ recipient, work, ended, minutes: Math.round(seconds / 60), address }));
}

async function pathOf(definition: string, payload: unknown): Promise<string | null> {
  const rows =
    definition === siftJob.name
      ? await db
          .select({ id: sifts.ensembleId })
          .from(sifts)
          .where(eq(sifts.id, siftJob.payload.parse(payload).siftId))
      : await db
          .select({ id: pairMatrices.ensembleId })
          .from(pairMatrices)
          .where(eq(pairMatrices.id, matrixJob.payload.parse(payload).matrixId));
  return rows[0] ? `/ensembles/${rows[0].id}/distinct-set` : null;
}

/**
 * Tells whoever asked for a job that it is over, where that took longer than two minutes from the asking. Waiting in the
 * queue counts: it is the person's time.
 *
 * @param holder the process that ended it, as its row names it: whoever lost it tells nothing
 */
export async function tellOfJob(jobId: string, holder: string | null): Promise<void> {
  const rows = await db
    .select({
      teamId: jobs.teamId,
      userId: jobs.userId,
      definition: jobs.definition,
      payload: jobs.payload,
      state: jobs.state,
      holder: jobs.holder,
      createdAt: jobs.createdAt,
      finishedAt: jobs.finishedAt,
    })
    .from(jobs)
    .where(eq(jobs.id, jobId));
  const job = rows[0];
  if (job === undefined || job.finishedAt === null || job.holder !== holder) return;
  if (job.state !== "done" && job.state !== "failed") return;
  const seconds = (job.finishedAt.getTime() - job.createdAt.getTime()) / 1000;
  if (seconds <= LONG_WORK_SECONDS) return;
  const work = job.definition === siftJob.name ? "sift" : "table of pair distances";
  const path = await pathOf(job.definition, job.payload);
  await tell({ teamId: job.teamId, userId: job.userId, work, ended: job.state, seconds, path });
}

/** Tells whoever sent files that reading them is over, where it took longer than two minutes; never holds the answer up. */
export function tellOfIntake(done: {
  grant: { teamId: string; userId: string | null } | null;
  began: number;
  ensembleId: string | null;
  now?: number;
}): void {
  const { grant, began, ensembleId } = done;
  const seconds = ((done.now ?? Date.now()) - began) / 1000;
  if (grant === null || seconds <= LONG_WORK_SECONDS) return;
  const { teamId, userId } = grant;
  const path = ensembleId === null ? null : `/ensembles/${ensembleId}/intake`;
  const ended = ensembleId === null ? "failed" : "done";
  inBackground("letter of an intake", () => tell({ teamId, userId, work: "intake", ended, seconds, path }));
}
