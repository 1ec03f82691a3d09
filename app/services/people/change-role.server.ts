import { and, eq } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { members } from "../../db/schema.server.ts";
import { type Actor, accessTeam, type MemberRole } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { roleLetter } from "./letters.ts";
import { keepAnOwner, lockMembers, stillOwner } from "./lock-members.server.ts";

/**
 * Gives a member another role; it counts from that person's next request, tokens included.
 *
 * @throws DomainError conflict where it would take the last owner away
 */
export async function changeRole(options: {
  actor: Actor;
  teamId: string;
  userId: string;
  role: MemberRole;
}): Promise<void> {
  const grant = await accessTeam(options.actor, "manage", options.teamId);
  await inTransaction(
    async (tx) => {
      const { team, members: people } = await lockMembers(tx, grant.teamId);
      stillOwner(people, grant.userId);
      const person = people.find(({ userId }) => userId === options.userId);
      if (person === undefined) throw notFound();
      if (person.role === options.role) return;
      if (person.role === "owner") keepAnOwner(people, person.userId);
      await tx
        .update(members)
        .set({ role: options.role })
        .where(and(eq(members.teamId, grant.teamId), eq(members.userId, person.userId)));
      const data = { name: person.name, before: person.role, after: options.role };
      await writeEntry(tx, grant, grant, { type: "role-changed", data });
      if (person.userId === grant.userId) return;
      await queueMail(roleLetter({ recipient: person.email, team, role: options.role }), tx);
    },
    { isolation: "read committed" },
  );
}
