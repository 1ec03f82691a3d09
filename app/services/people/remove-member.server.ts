import { and, eq, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { apiTokens, members } from "../../db/schema.server.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { forbidden, notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { removedLetter } from "./letters.ts";
import { keepAnOwner, lockMembers, stillOwner } from "./lock-members.server.ts";

/**
 * Takes a person out of a team, or lets one leave. Access and tokens end at once; what they did stays in the logbook.
 *
 * @throws DomainError forbidden for others than owners (but oneself), conflict for the last owner
 */
export async function removeMember(options: { actor: Actor; teamId: string; userId: string }): Promise<void> {
  const { actor } = options;
  if (actor.kind === "token") throw forbidden("A token never acts on people.");
  const own = actor.kind === "user" && actor.userId === options.userId;
  const grant = await accessTeam(actor, own ? "read" : "manage", options.teamId);
  await inTransaction(
    async (tx) => {
      const { team, members: people } = await lockMembers(tx, grant.teamId);
      if (!own) stillOwner(people, grant.userId);
      const person = people.find(({ userId }) => userId === options.userId);
      if (person === undefined) throw notFound();
      if (person.role === "owner") keepAnOwner(people, person.userId);
      const where = and(eq(members.teamId, grant.teamId), eq(members.userId, person.userId));
      await tx.delete(members).where(where);
      // Should the person come back, old tokens stay dead.
      await tx
        .update(apiTokens)
        .set({ revokedAt: new Date() })
        .where(
          and(
            eq(apiTokens.teamId, grant.teamId),
            eq(apiTokens.userId, person.userId),
            isNull(apiTokens.revokedAt),
          ),
        );
      const data = { name: person.name, role: person.role };
      await writeEntry(tx, grant, grant, { type: own ? "person-left" : "person-removed", data });
      if (!own) await queueMail(removedLetter({ recipient: person.email, team }), tx);
    },
    { isolation: "read committed" },
  );
}
