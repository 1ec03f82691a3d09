import { and, desc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { apiTokens, users } from "../../db/schema.server.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";

export interface TokenRow {
  id: string;
  name: string;
  /** First characters, for recognition. */
  prefix: string;
  scope: "full" | "read" | "add";
  owner: string;
  own: boolean;
  createdAt: string;
  endsAt: string | null;
  usedAt: string | null;
  ended: boolean;
}

/** Tokens of a team that were not revoked: owners see all, everybody else their own. */
export async function listTokens(options: { actor: Actor; teamId: string; now?: Date }): Promise<TokenRow[]> {
  const grant = await accessTeam(options.actor, "tokens", options.teamId);
  const now = options.now ?? new Date();
  const mine =
    grant.role === "owner" || grant.userId === null ? undefined : eq(apiTokens.userId, grant.userId);
  const rows = await db
    .select({
      id: apiTokens.id,
      name: apiTokens.name,
      prefix: apiTokens.prefix,
      scope: apiTokens.scope,
      userId: apiTokens.userId,
      owner: users.name,
      createdAt: apiTokens.createdAt,
      endsAt: apiTokens.endsAt,
      usedAt: apiTokens.usedAt,
    })
    .from(apiTokens)
    .innerJoin(users, eq(users.id, apiTokens.userId))
    .where(and(eq(apiTokens.teamId, grant.teamId), isNull(apiTokens.revokedAt), mine))
    .orderBy(desc(apiTokens.createdAt), desc(apiTokens.id));
  return rows.map(({ userId, ...row }) => ({
    ...row,
    own: userId === grant.userId,
    createdAt: row.createdAt.toISOString(),
    endsAt: row.endsAt?.toISOString() ?? null,
    usedAt: row.usedAt?.toISOString() ?? null,
    ended: row.endsAt !== null && row.endsAt <= now,
  }));
}
