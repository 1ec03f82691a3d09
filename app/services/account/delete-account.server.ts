import { and, eq, gt, isNotNull, isNull, ne, sql } from "drizzle-orm";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { apiTokens, mailTokens, members, teams, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Actor } from "../auth/access.server.ts";
import { endSessionsOf } from "../auth/end-session.server.ts";
import { newSecret, secretSha } from "../auth/secret.server.ts";
import type { Caller } from "../auth/sign-in.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { checkOwnPassword } from "./check-own-password.server.ts";
import { UNDO_DAYS } from "./undo-days.ts";

const DAY_MS = 86_400_000;

/** Teams of which the person is the only owner, by name; each is locked against other changes of people. */
async function solelyOwned(tx: Queryable, userId: string): Promise<string[]> {
  const owned = await tx
    .select({ id: teams.id, name: teams.name })
    .from(members)
    .innerJoin(teams, and(eq(teams.id, members.teamId), isNull(teams.deletedAt)))
    .where(and(eq(members.userId, userId), eq(members.role, "owner")))
    .for("update");
  const names: string[] = [];
  for (const team of owned) {
    const others = await tx
      .select({ n: sql<number>`count(*)` })
      .from(members)
      .innerJoin(users, and(eq(users.id, members.userId), isNull(users.disabledAt)))
      .where(and(eq(members.teamId, team.id), eq(members.role, "owner"), ne(members.userId, userId)));
    if (Number(others[0]?.n ?? 0) === 0) names.push(team.name);
  }
  return names;
}

/**
 * Closes the account of who is signed in: sessions and tokens end at once. A link in a letter brings it back for 30 days,
 * then it is removed; what was done stays in the logbooks without the name.
 *
 * @throws DomainError conflict where a team would be left without an owner
 */
export async function deleteAccount(options: {
  actor: Actor;
  password: string;
  caller: Caller;
}): Promise<void> {
  const account = await checkOwnPassword({ ...options, field: "confirm" });
  const now = new Date();
  const secret = newSecret();
  await inTransaction(async (tx) => {
    const left = await solelyOwned(tx, account.userId);
    if (left.length > 0) {
      throw new DomainError(
        "conflict",
        "Not deleted",
        `You are the only owner of ${left.join(", ")}. Make somebody else an owner there, or delete the team first.`,
      );
    }
    await tx.update(users).set({ deletedAt: now, disabledAt: now }).where(eq(users.id, account.userId));
    await endSessionsOf(account.userId, tx);
    await tx
      .update(apiTokens)
      .set({ revokedAt: now })
      .where(and(eq(apiTokens.userId, account.userId), isNull(apiTokens.revokedAt)));
    await tx.insert(mailTokens).values({
      tokenSha: secretSha(secret),
      userId: account.userId,
      purpose: "restore",
      createdAt: now,
      endsAt: new Date(now.getTime() + UNDO_DAYS * DAY_MS),
    });
    const by = { userId: account.userId, tokenId: null, origin: options.caller.address };
    await writeEntry(tx, { teamId: null }, by, { type: "account-deleted", data: {} });
    const body = `Your Lowlying account was closed. Within ${UNDO_DAYS} days this link brings it back; its tokens stay ended:\n\n${env().APP_ORIGIN}/restore-account/${secret}\n\nAfterwards the account is removed for good.`;
    await queueMail({ recipient: account.email, subject: "Your Lowlying account was closed", body }, tx);
  });
}

async function findClosed(secret: string, on: Queryable, lock: boolean) {
  const query = on
    .select({ userId: users.id, email: users.email })
    .from(mailTokens)
    .innerJoin(users, and(eq(users.id, mailTokens.userId), isNotNull(users.deletedAt)))
    .where(
      and(
        eq(mailTokens.tokenSha, secretSha(secret)),
        eq(mailTokens.purpose, "restore"),
        isNull(mailTokens.usedAt),
        gt(mailTokens.endsAt, new Date()),
      ),
    )
    .limit(1);
  return (await (lock ? query.for("update") : query))[0] ?? null;
}

/** True while a link can bring an account back. Looking uses nothing up. */
export async function isRestoreOpen(secret: string): Promise<boolean> {
  return (await findClosed(secret, db, false)) !== null;
}

/**
 * Opens a closed account again, as it was but for its tokens and sessions.
 *
 * @throws DomainError not-found where the link has ended
 */
export async function restoreAccount(options: { secret: string; caller: Caller }): Promise<void> {
  await inTransaction(async (tx) => {
    const closed = await findClosed(options.secret, tx, true);
    if (closed === null) {
      throw new DomainError("not-found", "This link has ended", "It was used, or the 30 days are over.");
    }
    await tx.update(users).set({ deletedAt: null, disabledAt: null }).where(eq(users.id, closed.userId));
    await tx
      .update(mailTokens)
      .set({ usedAt: new Date() })
      .where(eq(mailTokens.tokenSha, secretSha(options.secret)));
    const by = { userId: closed.userId, tokenId: null, origin: options.caller.address };
    await writeEntry(tx, { teamId: null }, by, { type: "account-restored", data: {} });
  });
}
