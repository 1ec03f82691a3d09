import { and, eq, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { invitations, jobs, teams } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { UNDO_DAYS } from "../account/undo-days.ts";
import { type Actor, accessDeletedTeam, accessTeam } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { teamDeletedLetter } from "../people/letters.ts";
import { lockMembers, stillOwner } from "../people/lock-members.server.ts";

const DAY_MS = 86_400_000;

/**
 * Deletes a team with all it holds, for everybody: pages, calls, tokens and read-only links end at once. An owner can
 * bring it back for 30 days.
 *
 * @param options.name the team's name, written out by whoever deletes it
 * @throws DomainError invalid where the name is another
 */
export async function deleteTeam(options: { actor: Actor; teamId: string; name: string }): Promise<void> {
  const grant = await accessTeam(options.actor, "manage", options.teamId);
  const now = new Date();
  await inTransaction(
    async (tx) => {
      const { team, members } = await lockMembers(tx, grant.teamId);
      stillOwner(members, grant.userId);
      if (options.name.trim() !== team) {
        const message = `Write the team's name, ${team}, to delete it.`;
        throw new DomainError("invalid", "Not deleted", message, { faults: [{ field: "confirm", message }] });
      }
      await tx.update(teams).set({ deletedAt: now }).where(eq(teams.id, grant.teamId));
      await tx
        .update(invitations)
        .set({ revokedAt: now })
        .where(
          and(
            eq(invitations.teamId, grant.teamId),
            isNull(invitations.usedAt),
            isNull(invitations.revokedAt),
          ),
        );
      await tx
        .update(jobs)
        .set({ state: "cancelled", finishedAt: now })
        .where(and(eq(jobs.teamId, grant.teamId), eq(jobs.state, "queued")));
      await writeEntry(tx, grant, grant, { type: "team-deleted", data: { name: team } });
      const by = members.find(({ userId }) => userId === grant.userId)?.name ?? "An owner";
      const until = new Date(now.getTime() + UNDO_DAYS * DAY_MS).toISOString().slice(0, 10);
      const address = `${env().APP_ORIGIN}/account`;
      for (const { email, role } of members) {
        if (role !== "owner") continue;
        await queueMail(teamDeletedLetter({ recipient: email, team, by, until, address }), tx);
      }
    },
    { isolation: "read committed" },
  );
}

/** Brings a deleted team back as it was; invitations that waited have ended. */
export async function restoreTeam(options: { actor: Actor; teamId: string }): Promise<void> {
  const grant = await accessDeletedTeam(options.actor, options.teamId);
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ name: teams.name, deletedAt: teams.deletedAt })
      .from(teams)
      .where(eq(teams.id, grant.teamId))
      .for("update");
    const team = rows[0];
    if (team?.deletedAt == null) throw notFound();
    await tx.update(teams).set({ deletedAt: null }).where(eq(teams.id, grant.teamId));
    await writeEntry(tx, grant, grant, { type: "team-restored", data: { name: team.name } });
  });
}
