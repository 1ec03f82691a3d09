import { and, eq, gt, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { invitations } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessTeam, type MemberRole } from "../auth/access.server.ts";
import { newSecret, secretSha } from "../auth/secret.server.ts";
import { restingError } from "../auth/sign-in.server.ts";
import { takeAttempt } from "../auth/throttle.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { invitationLetter } from "./letters.ts";
import { lockMembers, stillOwner } from "./lock-members.server.ts";
import { INVITATION_DAYS } from "./people-fields.ts";

const DAY_MS = 86_400_000;
const LETTERS_A_DAY = 100;

const refused = (message: string) =>
  new DomainError("conflict", "Not invited", message, { faults: [{ field: "email", message }] });

/**
 * Invites an address into a team by mail. A waiting invitation of the same address is replaced, so that the newest link
 * alone works.
 *
 * @throws DomainError conflict where the person is a member already, too-many beyond 100 letters a day
 */
export async function invite(options: {
  actor: Actor;
  teamId: string;
  email: string;
  role: MemberRole;
  now?: Date;
}): Promise<void> {
  const grant = await accessTeam(options.actor, "manage", options.teamId);
  const { email, role } = options;
  const limit = { kind: "invitation", subject: grant.teamId, limit: LETTERS_A_DAY, seconds: 86_400 };
  const wait = await takeAttempt(limit);
  if (wait !== null) throw restingError(wait);
  const now = options.now ?? new Date();
  const secret = newSecret();
  await inTransaction(
    async (tx) => {
      const { team, members } = await lockMembers(tx, grant.teamId);
      stillOwner(members, grant.userId);
      if (members.some((person) => person.email === email)) {
        throw refused("This address belongs to a member of the team already.");
      }
      await tx
        .update(invitations)
        .set({ revokedAt: now })
        .where(
          and(
            eq(invitations.teamId, grant.teamId),
            eq(invitations.email, email),
            isNull(invitations.usedAt),
            isNull(invitations.revokedAt),
          ),
        );
      await tx.insert(invitations).values({
        id: newId(),
        teamId: grant.teamId,
        email,
        role,
        tokenSha: secretSha(secret),
        createdBy: grant.userId,
        createdAt: now,
        endsAt: new Date(now.getTime() + INVITATION_DAYS * DAY_MS),
      });
      await writeEntry(tx, grant, grant, { type: "invited", data: { email, role } });
      const by = members.find(({ userId }) => userId === grant.userId)?.name ?? "An owner";
      const address = `${env().APP_ORIGIN}/invitation/${secret}`;
      const letter = invitationLetter({ recipient: email, team, by, role, address, days: INVITATION_DAYS });
      await queueMail(letter, tx);
    },
    { isolation: "read committed" },
  );
}

/** Takes back an invitation that waits; its link leads nowhere from then on. */
export async function withdrawInvitation(options: {
  actor: Actor;
  teamId: string;
  invitationId: string;
}): Promise<void> {
  const grant = await accessTeam(options.actor, "manage", options.teamId);
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ email: invitations.email })
      .from(invitations)
      .where(
        and(
          eq(invitations.id, options.invitationId),
          eq(invitations.teamId, grant.teamId),
          isNull(invitations.usedAt),
          isNull(invitations.revokedAt),
          gt(invitations.endsAt, new Date()),
        ),
      )
      .for("update");
    const found = rows[0];
    if (found === undefined) throw notFound();
    await tx
      .update(invitations)
      .set({ revokedAt: new Date() })
      .where(eq(invitations.id, options.invitationId));
    await writeEntry(tx, grant, grant, { type: "invitation-withdrawn", data: found });
  });
}
