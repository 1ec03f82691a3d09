import { eq } from "drizzle-orm";
import { z } from "zod";
import { inTransaction } from "../../db/client.server.ts";
import { teams } from "../../db/schema.server.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

export const teamSchema = z.strictObject({
  name: z.string().trim().min(1, "A team has a name.").max(120, "At most 120 characters."),
  linkDays: z.coerce
    .number({ error: "A whole number of days from 1 to 366." })
    .int("A whole number of days from 1 to 366.")
    .min(1, "At least one day.")
    .max(366, "At most 366 days."),
});

/** Gives a team another name, or its read-only links another longest life. Links that live keep their end. */
export async function changeTeam(options: {
  actor: Actor;
  teamId: string;
  team: z.infer<typeof teamSchema>;
}): Promise<void> {
  const grant = await accessTeam(options.actor, "manage", options.teamId);
  const { name, linkDays } = options.team;
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ name: teams.name, linkDays: teams.linkDays })
      .from(teams)
      .where(eq(teams.id, grant.teamId))
      .for("update");
    const before = rows[0];
    if (before === undefined) throw notFound();
    await tx.update(teams).set({ name, linkDays }).where(eq(teams.id, grant.teamId));
    if (before.name !== name) {
      await writeEntry(tx, grant, grant, {
        type: "team-renamed",
        data: { before: before.name, after: name },
      });
    }
    if (before.linkDays !== linkDays) {
      const data = { before: before.linkDays, after: linkDays };
      await writeEntry(tx, grant, grant, { type: "link-days-set", data });
    }
  });
}
