import { and, eq, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { apiTokens } from "../../db/schema.server.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { tellOfToken } from "./tell-of-token.server.ts";

/** Ends a token at once: one's own, or as an owner anybody's in the team. */
export async function revokeToken(options: { actor: Actor; teamId: string; tokenId: string }): Promise<void> {
  const grant = await accessTeam(options.actor, "tokens", options.teamId);
  await inTransaction(async (tx) => {
    const mine =
      grant.role === "owner" || grant.userId === null ? undefined : eq(apiTokens.userId, grant.userId);
    const rows = await tx
      .select({ prefix: apiTokens.prefix, name: apiTokens.name, userId: apiTokens.userId })
      .from(apiTokens)
      .where(
        and(
          eq(apiTokens.id, options.tokenId),
          eq(apiTokens.teamId, grant.teamId),
          isNull(apiTokens.revokedAt),
          mine,
        ),
      )
      .for("update");
    const token = rows[0];
    if (token === undefined) throw notFound();
    await tx.update(apiTokens).set({ revokedAt: new Date() }).where(eq(apiTokens.id, options.tokenId));
    const { userId, ...data } = token;
    await writeEntry(tx, grant, grant, { type: "token-revoked", data });
    await tellOfToken(tx, { teamId: grant.teamId, userId }, token.prefix, "revoked");
  });
}
