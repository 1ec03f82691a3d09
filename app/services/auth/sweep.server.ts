import { lt, or } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { mailQueue, mailTokens, sessions } from "../../db/schema.server.ts";
import { sweepAttempts } from "./throttle.server.ts";

const DAY_MS = 86_400_000;

/** Removes what has ended: sessions, links, counters, letters of the last month. */
export async function sweepEnded(now = new Date()): Promise<void> {
  const yesterday = new Date(now.getTime() - DAY_MS);
  const lastMonth = new Date(now.getTime() - 30 * DAY_MS);
  await db.delete(sessions).where(lt(sessions.endsAt, now));
  await db.delete(mailTokens).where(lt(mailTokens.endsAt, yesterday));
  await db.delete(mailQueue).where(or(lt(mailQueue.sentAt, lastMonth), lt(mailQueue.failedAt, lastMonth)));
  await sweepAttempts(now);
}
