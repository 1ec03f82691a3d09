import { z } from "zod";
import { db } from "../../db/client.server.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { makeToken, type NewToken, TOKEN_DAYS } from "../auth/make-token.server.ts";
import { forbidden } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { tellOfToken } from "./tell-of-token.server.ts";

export const newTokenSchema = z.strictObject({
  name: z.string().trim().min(1, "Say what the token is for.").max(120),
  scope: z.enum(["full", "read", "add"]),
  days: z.coerce
    .number()
    .int()
    .min(1, "At least one day.")
    .max(TOKEN_DAYS.most, `At most ${TOKEN_DAYS.most} days.`),
});

/** Makes a token for oneself; a reader may make one that reads. The secret is in the answer and nowhere else. */
export async function createToken(options: {
  actor: Actor;
  teamId: string;
  token: z.infer<typeof newTokenSchema>;
}): Promise<NewToken> {
  const grant = await accessTeam(options.actor, "tokens", options.teamId);
  const asked = newTokenSchema.parse(options.token);
  if (grant.userId === null) throw forbidden("Tokens belong to a person.");
  if (grant.role === "reader" && asked.scope !== "read") {
    throw forbidden('A reader\'s token may only read. Choose "read only".');
  }
  const made = await makeToken({ ...asked, teamId: grant.teamId, userId: grant.userId });
  await tellOfToken(db, { ...grant, userId: grant.userId }, made.prefix, "made");
  await writeEntry(db, grant, grant, {
    type: "token-made",
    data: {
      prefix: made.prefix,
      name: asked.name,
      scope: asked.scope,
      endsAt: made.endsAt.toISOString(),
    },
  });
  return made;
}
