import { db, type Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { sessions } from "../../db/schema.server.ts";
import { newSecret, secretSha } from "./secret.server.ts";
import { SESSION_ABSOLUTE_SECONDS } from "./session-times.ts";

/**
 * Opens a session.
 *
 * @returns its secret, for the cookie; only its SHA-256 is stored
 */
export async function startSession(
  options: { userId: string; stay: boolean; userAgent: string | null; now?: Date },
  on: Queryable = db,
): Promise<string> {
  const now = options.now ?? new Date();
  const secret = newSecret();
  await on.insert(sessions).values({
    id: newId(),
    tokenSha: secretSha(secret),
    userId: options.userId,
    createdAt: now,
    seenAt: now,
    endsAt: new Date(now.getTime() + SESSION_ABSOLUTE_SECONDS * 1000),
    stay: options.stay,
    userAgent: options.userAgent?.slice(0, 255) ?? null,
  });
  return secret;
}
