import { and, eq, gt, isNull, lt } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { sessions, users } from "../../db/schema.server.ts";
import { secretSha } from "./secret.server.ts";
import { SESSION_IDLE_SECONDS } from "./session-times.ts";

const SEEN_STEP_MS = 60_000;

export interface FoundSession {
  userId: string;
  sessionId: string;
}

/**
 * Who a session's secret belongs to; null where the session has ended, was not used for too long, or its user is
 * disabled. Looked up on every request, so that an end acts at once.
 */
export async function findSession(secret: string, now = new Date()): Promise<FoundSession | null> {
  const rows = await db
    .select({
      sessionId: sessions.id,
      userId: sessions.userId,
      seenAt: sessions.seenAt,
      stay: sessions.stay,
    })
    .from(sessions)
    .innerJoin(users, and(eq(users.id, sessions.userId), isNull(users.disabledAt)))
    .where(and(eq(sessions.tokenSha, secretSha(secret)), gt(sessions.endsAt, now)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) return null;
  const idleMs = now.getTime() - row.seenAt.getTime();
  if (!row.stay && idleMs > SESSION_IDLE_SECONDS * 1000) return null;
  if (idleMs > SEEN_STEP_MS) {
    await db
      .update(sessions)
      .set({ seenAt: now })
      .where(and(eq(sessions.id, row.sessionId), lt(sessions.seenAt, now)));
  }
  return { userId: row.userId, sessionId: row.sessionId };
}
