import { eq } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { sessions } from "../../db/schema.server.ts";

/** Ends one session; its cookie is worth nothing from then on. */
export async function endSession(sessionId: string, on: Queryable = db): Promise<void> {
  await on.delete(sessions).where(eq(sessions.id, sessionId));
}

/** Ends every session of a user: after a change of password, or when the account is disabled. */
export async function endSessionsOf(userId: string, on: Queryable = db): Promise<void> {
  await on.delete(sessions).where(eq(sessions.userId, userId));
}
