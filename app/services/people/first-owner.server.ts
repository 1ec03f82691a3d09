import { and, eq, isNull, notExists } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { invitations, members, teams, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { newSecret, secretSha } from "../auth/secret.server.ts";
import { onCommandLine } from "../command-line.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { INVITATION_DAYS, invitationSchema } from "./people-fields.ts";

const DAY_MS = 86_400_000;

export interface FirstOwner {
  /** Of the one-time link; shown once, kept nowhere. */
  secret: string;
  /** The team waited for its owner already: the link of before leads nowhere now. */
  renewed: boolean;
}

interface Asked {
  email: string;
  team: string;
}

function readAsked(options: Asked): Asked {
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
  return { email: asked.data.email, team };
}

async function refuseMember(tx: Transaction, { email, team }: Asked): Promise<void> {
  const rows = await tx
    .select({ id: teams.id })
    .from(members)
    .innerJoin(users, and(eq(users.id, members.userId), eq(users.email, email)))
    .innerJoin(teams, and(eq(teams.id, members.teamId), eq(teams.name, team), isNull(teams.deletedAt)))
    .limit(1);
  if (rows.length === 0) return;
  throw new DomainError(
    "conflict",
    "Not made",
    `${email} is in a team of this name already. Nothing was made; give another team another name.`,
  );
}

/** The team that this address was asked to own and that nobody has joined, with its open invitations withdrawn. */
async function reopen(tx: Transaction, { email, team }: Asked, now: Date): Promise<string | null> {
  const joined = tx.select().from(members).where(eq(members.teamId, teams.id));
  const owned = and(
    eq(invitations.email, email),
    eq(invitations.role, "owner"),
    isNull(invitations.createdBy),
  );
  const rows = await tx
    .select({ id: teams.id })
    .from(teams)
    .innerJoin(invitations, and(eq(invitations.teamId, teams.id), owned))
    .where(and(eq(teams.name, team), isNull(teams.deletedAt), notExists(joined)))
    .limit(1);
  const teamId = rows[0]?.id;
  if (teamId === undefined) return null;
  const open = and(isNull(invitations.usedAt), isNull(invitations.revokedAt));
  await tx
    .update(invitations)
    .set({ revokedAt: now })
    .where(and(eq(invitations.teamId, teamId), owned, open));
  return teamId;
}

/**
 * Makes a team and the secret of a one-time link by which its first owner joins it: how a new installation without open
 * sign-up gets its first person. For whoever can already read the database: the command `npm run owner`. Asked again for
 * the same address and name before anybody joined, it is the same team with a new link.
 *
 * @throws DomainError invalid, or conflict where the address is in a team of this name, in words for the command line
 */
export async function makeFirstOwner(options: Asked & { now?: Date }): Promise<FirstOwner> {
  const asked = readAsked(options);
  const { email, team } = asked;
  const now = options.now ?? new Date();
  const secret = newSecret();
  return inTransaction(async (tx) => {
    await refuseMember(tx, asked);
    const waiting = await reopen(tx, asked, now);
    const teamId = waiting ?? newId();
    const by = { userId: null, tokenId: null };
    if (waiting === null) {
      await tx.insert(teams).values({ id: teamId, name: team, createdAt: now });
      await writeEntry(tx, { teamId }, by, { type: "team-made", data: { name: team } });
    }
    await tx.insert(invitations).values({
      id: newId(),
      teamId,
      email,
      role: "owner",
      tokenSha: secretSha(secret),
      createdAt: now,
      endsAt: new Date(now.getTime() + INVITATION_DAYS * DAY_MS),
    });
    await writeEntry(tx, { teamId }, by, { type: "invited", data: { email, role: "owner" } });
    return { secret, renewed: waiting !== null };
  });
}

/** For a process that makes one and ends: `scripts/owner.mjs`. */
export function makeFirstOwnerOnce(options: Asked): Promise<FirstOwner> {
  return onCommandLine(() => makeFirstOwner(options));
}
