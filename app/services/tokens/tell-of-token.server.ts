import { and, eq, isNull } from "drizzle-orm";
import type { Queryable } from "../../db/client.server.ts";
import { teams, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { tokenLetter } from "../mail/letters.ts";
import { queueMail } from "../mail/queue-mail.server.ts";

/** Tells the person whose token it is; who made or revoked it stands in the logbook. */
export async function tellOfToken(
  on: Queryable,
  at: { teamId: string; userId: string },
  prefix: string,
  what: "made" | "revoked",
): Promise<void> {
  const [rows, named] = await Promise.all([
    on
      .select({ email: users.email })
      .from(users)
      .where(and(eq(users.id, at.userId), isNull(users.disabledAt))),
    on.select({ name: teams.name }).from(teams).where(eq(teams.id, at.teamId)),
  ]);
  const recipient = rows[0]?.email;
  if (recipient === undefined) return;
  const address = `${env().APP_ORIGIN}/teams/${at.teamId}/tokens`;
  await queueMail(tokenLetter({ recipient, team: named[0]?.name ?? "", prefix, what, address }), on);
}
