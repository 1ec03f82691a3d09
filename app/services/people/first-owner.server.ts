import { inTransaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { invitations, teams } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { newSecret, secretSha } from "../auth/secret.server.ts";
import { onCommandLine } from "../command-line.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { INVITATION_DAYS, invitationSchema } from "./people-fields.ts";

const DAY_MS = 86_400_000;

/**
 * Makes a team and a one-time link by which its first owner joins it: how a new installation without open sign-up gets
 * its first person. For whoever can already read the database: the command `npm run owner`.
 *
 * @returns the address of the invitation; shown once, kept nowhere
 * @throws DomainError invalid in words for the command line
 */
export async function makeFirstOwner(options: { email: string; team: string; now?: Date }): Promise<string> {
  const asked = invitationSchema.safeParse({ email: options.email, role: "owner" });
  const team = options.team.trim();
  if (!asked.success) {
    throw new DomainError(
      "invalid",
      "Not made",
      asked.error.issues[0]?.message ?? "This is no mail address.",
    );
  }
  if (team.length === 0 || team.length > 120) {
    throw new DomainError("invalid", "Not made", "Name the team: --team NAME, at most 120 characters.");
  }
  const now = options.now ?? new Date();
  const secret = newSecret();
  const { email } = asked.data;
  await inTransaction(async (tx) => {
    const teamId = newId();
    const by = { userId: null, tokenId: null };
    await tx.insert(teams).values({ id: teamId, name: team, createdAt: now });
    await tx.insert(invitations).values({
      id: newId(),
      teamId,
      email,
      role: "owner",
      tokenSha: secretSha(secret),
      createdAt: now,
      endsAt: new Date(now.getTime() + INVITATION_DAYS * DAY_MS),
    });
    await writeEntry(tx, { teamId }, by, { type: "team-made", data: { name: team } });
    await writeEntry(tx, { teamId }, by, { type: "invited", data: { email, role: "owner" } });
  });
  return `${env().APP_ORIGIN}/invitation/${secret}`;
}

/** For a process that makes one and ends: `scripts/owner.mjs`. */
export function makeFirstOwnerOnce(options: { email: string; team: string }): Promise<string> {
  return onCommandLine(() => makeFirstOwner(options));
}
