import { and, desc, eq, gt, ne } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { sessions } from "../../db/schema.server.ts";
import type { Actor } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { browserWords } from "./browser-words.ts";
import { ownAccount } from "./check-own-password.server.ts";

export interface SessionRow {
  id: string;
  /** What the browser calls itself, in two words. */
  browser: string;
  here: boolean;
  stay: boolean;
  createdAt: string;
  seenAt: string;
  endsAt: string;
}

/** The open sessions of who is signed in, the last used first. */
export async function listSessions(options: { actor: Actor; now?: Date }): Promise<SessionRow[]> {
  const account = await ownAccount(options.actor);
  const rows = await db
    .select()
    .from(sessions)
    .where(and(eq(sessions.userId, account.userId), gt(sessions.endsAt, options.now ?? new Date())))
    .orderBy(desc(sessions.seenAt), desc(sessions.id));
  return rows.map((row) => ({
    id: row.id,
    browser: browserWords(row.userAgent),
    here: row.id === account.sessionId,
    stay: row.stay,
    createdAt: row.createdAt.toISOString(),
    seenAt: row.seenAt.toISOString(),
    endsAt: row.endsAt.toISOString(),
  }));
}

/**
 * Ends one of one's own sessions, or all but the one at hand.
 *
 * @param options.sessionId null ends all others
 * @throws DomainError not-found where there is no such session of this person
 */
export async function endOwnSessions(options: { actor: Actor; sessionId: string | null }): Promise<number> {
  const account = await ownAccount(options.actor);
  return inTransaction(async (tx) => {
    const which =
      options.sessionId === null ? ne(sessions.id, account.sessionId) : eq(sessions.id, options.sessionId);
    const [done] = await tx.delete(sessions).where(and(eq(sessions.userId, account.userId), which));
    const count = done.affectedRows;
    if (count === 0 && options.sessionId !== null) throw notFound();
    if (count > 0) {
      const by = { userId: account.userId, tokenId: null };
      await writeEntry(tx, { teamId: null }, by, { type: "sessions-ended", data: { count } });
    }
    return count;
  });
}
