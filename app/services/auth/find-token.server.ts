import { and, eq, gt, isNull, lt, or } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { apiTokens, members, teams, users } from "../../db/schema.server.ts";
import type { Actor } from "./access.server.ts";
import { secretSha } from "./secret.server.ts";

/** Every token begins so, for people and for scanners of leaked secrets. */
export const TOKEN_PREFIX = "lowl_";
const TOKEN_FORM = /^lowl_[A-Za-z0-9_-]{43}$/;
const USED_STEP_MS = 60_000;

/**
 * The actor of a bearer token; null where it is unknown, ended or revoked, its user is disabled or no longer in the
 * team, or the team is deleted.
 */
export async function findToken(
  secret: string,
  now = new Date(),
): Promise<Extract<Actor, { kind: "token" }> | null> {
  if (!TOKEN_FORM.test(secret)) return null;
  const rows = await db
    .select({
      tokenId: apiTokens.id,
      userId: apiTokens.userId,
      teamId: apiTokens.teamId,
      scope: apiTokens.scope,
      usedAt: apiTokens.usedAt,
    })
    .from(apiTokens)
    .innerJoin(users, and(eq(users.id, apiTokens.userId), isNull(users.disabledAt)))
    .innerJoin(members, and(eq(members.teamId, apiTokens.teamId), eq(members.userId, apiTokens.userId)))
    .innerJoin(teams, and(eq(teams.id, apiTokens.teamId), isNull(teams.deletedAt)))
    .where(
      and(
        eq(apiTokens.tokenSha, secretSha(secret)),
        isNull(apiTokens.revokedAt),
        or(isNull(apiTokens.endsAt), gt(apiTokens.endsAt, now)),
      ),
    )
    .limit(1);
  const row = rows[0];
  if (row === undefined) return null;
  const { usedAt, ...token } = row;
  await noteUse(token.tokenId, usedAt, now);
  return { kind: "token", ...token };
}

/** Last use to the minute: a write on every call would cost more than the call. */
async function noteUse(tokenId: string, usedAt: Date | null, now: Date): Promise<void> {
  const before = new Date(now.getTime() - USED_STEP_MS);
  if (usedAt !== null && usedAt > before) return;
  await db
    .update(apiTokens)
    .set({ usedAt: now })
    .where(and(eq(apiTokens.id, tokenId), or(isNull(apiTokens.usedAt), lt(apiTokens.usedAt, before))));
}
