import { and, eq, gt, isNull } from "drizzle-orm";
import { db, inTransaction, type Queryable, type Transaction } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { invitations, members, teams, users } from "../../db/schema.server.ts";
import { DomainError, type Fault } from "../../lib/errors.ts";
import type { Actor, MemberRole } from "../auth/access.server.ts";
import { hashPassword } from "../auth/hash-password.server.ts";
import { passwordFault } from "../auth/password-rules.server.ts";
import { secretSha } from "../auth/secret.server.ts";
import { type Caller, signIn } from "../auth/sign-in.server.ts";
import { startSession } from "../auth/start-session.server.ts";
import { forbidden } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

export interface OpenInvitation {
  team: string;
  role: MemberRole;
  email: string;
  by: string | null;
  endsAt: string;
  /** The address has an account already: its password lets it in. */
  known: boolean;
}

async function findOpen(secret: string, on: Queryable, lock: boolean) {
  const query = on
    .select({
      id: invitations.id,
      teamId: invitations.teamId,
      team: teams.name,
      role: invitations.role,
      email: invitations.email,
      endsAt: invitations.endsAt,
      createdBy: invitations.createdBy,
    })
    .from(invitations)
    .innerJoin(teams, and(eq(teams.id, invitations.teamId), isNull(teams.deletedAt)))
    .where(
      and(
        eq(invitations.tokenSha, secretSha(secret)),
        isNull(invitations.usedAt),
        isNull(invitations.revokedAt),
        gt(invitations.endsAt, new Date()),
      ),
    )
    .limit(1);
  return (await (lock ? query.for("update") : query))[0] ?? null;
}

/** What an invitation says; null once it was used, withdrawn or has ended. Looking uses nothing up. */
export async function findInvitation(secret: string): Promise<OpenInvitation | null> {
  const found = await findOpen(secret, db, false);
  if (found === null) return null;
  const by =
    found.createdBy === null
      ? undefined
      : (await db.select({ name: users.name }).from(users).where(eq(users.id, found.createdBy)))[0];
  const account = await db.select({ id: users.id }).from(users).where(eq(users.email, found.email)).limit(1);
  return {
    team: found.team,
    role: found.role,
    email: found.email,
    by: by?.name ?? null,
    endsAt: found.endsAt.toISOString(),
    known: account.length > 0,
  };
}

const ended = () =>
  new DomainError(
    "not-found",
    "No open invitation",
    "It was used or withdrawn, is older than seven days, or its address is not complete. Ask for another.",
  );

/** Uses the invitation up and makes the person a member, in the transaction of the caller. */
async function joinTeam(tx: Transaction, secret: string, userId: string, name: string, address: string) {
  const found = await findOpen(secret, tx, true);
  if (found === null) throw ended();
  const now = new Date();
  await tx.update(invitations).set({ usedAt: now }).where(eq(invitations.id, found.id));
  const known = await tx
    .select({ role: members.role })
    .from(members)
    .where(and(eq(members.teamId, found.teamId), eq(members.userId, userId)))
    .for("update");
  // Who is in already keeps the role: an old letter must not raise or lower it.
  if (known.length > 0) return found.teamId;
  await tx.insert(members).values({ teamId: found.teamId, userId, role: found.role, createdAt: now });
  const by = { userId, tokenId: null, origin: address };
  await writeEntry(tx, { teamId: found.teamId }, by, { type: "joined", data: { name, role: found.role } });
  return found.teamId;
}

/**
 * Joins by an invitation that was sent to the address of whoever is signed in.
 *
 * @throws DomainError not-found where it has ended, forbidden where it was sent to another address
 */
export async function joinSignedIn(options: {
  actor: Actor;
  secret: string;
  caller: Caller;
}): Promise<{ teamId: string }> {
  const { actor, secret, caller } = options;
  if (actor.kind !== "user") throw forbidden("Sign in first.");
  return inTransaction(async (tx) => {
    const found = await findOpen(secret, tx, true);
    if (found === null) throw ended();
    const [person] = await tx
      .select({ email: users.email, name: users.name })
      .from(users)
      .where(eq(users.id, actor.userId));
    if (person?.email !== found.email) {
      throw forbidden("This invitation was sent to another address. Sign in with that one.");
    }
    return { teamId: await joinTeam(tx, secret, actor.userId, person.name, caller.address) };
  });
}

function checkNew(name: string, password: string, email: string): void {
  const faults: Fault[] = [];
  if (name.length === 0 || name.length > 120) {
    faults.push({ field: "name", message: "Give a name of up to 120 characters, as the logbook shows it." });
  }
  const wrong = passwordFault(password, email);
  if (wrong !== null) faults.push({ field: "password", message: wrong });
  if (faults.length === 0) return;
  throw new DomainError("invalid", "Not joined", "Some fields need another value.", { faults });
}

/**
 * Joins without being signed in: with the password of the account that the address has, or with a new account. The
 * letter proves the address.
 *
 * @returns the secret of a new session
 * @throws DomainError not-found where it has ended, invalid by field
 */
export async function joinByPassword(options: {
  secret: string;
  name: string;
  password: string;
  caller: Caller;
}): Promise<{ teamId: string; session: string }> {
  const { secret, password, caller } = options;
  const open = await findInvitation(secret);
  if (open === null) throw ended();
  if (open.known) {
    const { userId, secret: session } = await signIn({ email: open.email, password, stay: false, caller });
    const { teamId } = await joinSignedIn({
      actor: { kind: "user", userId, sessionId: "" },
      secret,
      caller,
    });
    return { teamId, session };
  }
  const name = options.name.trim();
  checkNew(name, password, open.email);
  const passwordHash = await hashPassword(password);
  const [userId, createdAt] = [newId(), new Date()];
  try {
    return await inTransaction(async (tx) => {
      const account = {
        id: userId,
        email: open.email,
        name,
        passwordHash,
        createdAt,
        confirmedAt: createdAt,
      };
      await tx.insert(users).values(account);
      const teamId = await joinTeam(tx, secret, userId, name, caller.address);
      const by = { userId, tokenId: null, origin: caller.address };
      await writeEntry(tx, { teamId: null }, by, { type: "sign-up", data: {} });
      const session = await startSession({ userId, stay: false, userAgent: caller.userAgent }, tx);
      return { teamId, session };
    });
  } catch (error) {
    if (!isDuplicate(error)) throw error;
    throw new DomainError(
      "conflict",
      "Not joined",
      "An account with this address was opened a moment ago. Load the page again.",
    );
  }
}
