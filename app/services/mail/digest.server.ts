import { and, eq, gt, inArray, isNull, lt, or } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { logbook, members, teams, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { plural } from "../../lib/format.ts";
import { digestLetter } from "./letters.ts";
import { queueMail } from "./queue-mail.server.ts";

const WEEK_MS = 7 * 86_400_000;

/** What a week is told by: entries of the logbook, and what one of them is called. */
const COUNTED = [
  { type: "intake", word: "ensemble taken in", words: "ensembles taken in" },
  { type: "batch", word: "batch added", words: "batches added" },
  { type: "edition-frozen", word: "edition frozen", words: "editions frozen" },
  { type: "link-made", word: "link made", words: "links made" },
  { type: "remark", word: "remark", words: "remarks" },
  { type: "joined", word: "person joined", words: "people joined" },
] as const;

async function countsOf(teamId: string, since: Date): Promise<string[]> {
  const types = COUNTED.map(({ type }) => type);
  const rows = await db
    .select({ type: logbook.type })
    .from(logbook)
    .where(and(eq(logbook.teamId, teamId), inArray(logbook.type, types), gt(logbook.createdAt, since)));
  return COUNTED.flatMap(({ type, word, words }) => {
    const count = rows.filter((row) => row.type === type).length;
    return count === 0 ? [] : [plural(count, word, words)];
  });
}

async function teamsOf(userId: string, since: Date) {
  const own = await db
    .select({ id: teams.id, name: teams.name })
    .from(members)
    .innerJoin(teams, and(eq(teams.id, members.teamId), isNull(teams.deletedAt)))
    .where(eq(members.userId, userId));
  const told = await Promise.all(
    own.map(async ({ id, name }) => ({ name, counts: await countsOf(id, since) })),
  );
  return told.filter(({ counts }) => counts.length > 0);
}

/**
 * Sends the weekly letter to whoever asked for it, a week after the last or after the asking. A week in which nothing
 * happened is no letter.
 *
 * @returns how many letters were queued
 */
export async function sendDigests(now = new Date()): Promise<number> {
  const since = new Date(now.getTime() - WEEK_MS);
  const due = and(
    eq(users.digest, true),
    isNull(users.disabledAt),
    or(isNull(users.digestAt), lt(users.digestAt, since)),
  );
  const rows = await db.select({ id: users.id, email: users.email }).from(users).where(due);
  let queued = 0;
  for (const { id, email } of rows) {
    const told = await teamsOf(id, since);
    await inTransaction(async (tx) => {
      // Another process may have been faster.
      const [mine] = await tx
        .update(users)
        .set({ digestAt: now })
        .where(and(eq(users.id, id), due));
      if (mine.affectedRows === 0 || told.length === 0) return;
      const letter = digestLetter({ recipient: email, teams: told, address: `${env().APP_ORIGIN}/teams` });
      await queueMail(letter, tx);
      queued += 1;
    });
  }
  return queued;
}
