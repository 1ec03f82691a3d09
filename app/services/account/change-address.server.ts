import { and, eq, gt, isNull } from "drizzle-orm";
import { z } from "zod";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { mailTokens, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Actor } from "../auth/access.server.ts";
import { newSecret, secretSha } from "../auth/secret.server.ts";
import { type Caller, normalEmail, restingError } from "../auth/sign-in.server.ts";
import { takeAttempt } from "../auth/throttle.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { confirmLetter } from "../mail/letters.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { checkOwnPassword, ownAccount } from "./check-own-password.server.ts";

const CONFIRM_HOURS = 24;
const LETTERS_A_DAY = 10;
const newAddress = z.object({ email: z.string() });

/** Keeps a secret for one address of one account; an older one of the same account ends. */
async function keepSecret(tx: Queryable, userId: string, email: string, now: Date): Promise<string> {
  const secret = newSecret();
  await tx.delete(mailTokens).where(and(eq(mailTokens.userId, userId), eq(mailTokens.purpose, "address")));
  await tx.insert(mailTokens).values({
    tokenSha: secretSha(secret),
    userId,
    purpose: "address",
    data: { email },
    createdAt: now,
    endsAt: new Date(now.getTime() + CONFIRM_HOURS * 3_600_000),
  });
  return `${env().APP_ORIGIN}/confirm-address/${secret}`;
}

/** Sends the letter that confirms the address an account has, in the transaction of the act that needs it. */
export async function askToConfirm(
  tx: Queryable,
  account: { userId: string; email: string },
  now = new Date(),
): Promise<void> {
  const address = await keepSecret(tx, account.userId, account.email, now);
  await queueMail(confirmLetter({ recipient: account.email, address, hours: CONFIRM_HOURS }), tx);
}

const letterLimit = (userId: string) => ({
  kind: "new-address",
  subject: userId,
  limit: LETTERS_A_DAY,
  seconds: 86_400,
});

/**
 * Sends the letter that confirms the account's address again; nothing where it is confirmed already.
 *
 * @throws DomainError too-many beyond ten letters a day
 */
export async function confirmAgain(options: { actor: Actor }): Promise<void> {
  const { userId, email, confirmed } = await ownAccount(options.actor);
  if (confirmed) return;
  const wait = await takeAttempt(letterLimit(userId));
  if (wait !== null) throw restingError(wait);
  await inTransaction((tx) => askToConfirm(tx, { userId, email }));
}

/**
 * Sends a letter to a new address; the account keeps the old one until the link in it is used. The old address is told.
 * Whether the new one has an account is not told.
 *
 * @throws DomainError invalid by field
 */
export async function askNewAddress(options: {
  actor: Actor;
  email: string;
  password: string;
  caller: Caller;
}): Promise<void> {
  const { actor, password, caller } = options;
  const email = normalEmail(options.email);
  const account = await checkOwnPassword({ actor, password, caller });
  if (!/^[^\s@]+@[^\s@.]+(\.[^\s@.]+)*$/.test(email) || email === account.email) {
    const message =
      email === account.email
        ? "This is your address already."
        : "This is no mail address; one looks like name@laboratory.example.";
    throw new DomainError("invalid", "Not changed", message, { faults: [{ field: "email", message }] });
  }
  const wait = await takeAttempt(letterLimit(account.userId));
  if (wait !== null) throw restingError(wait);
  const known = await db.select({ id: users.id }).from(users).where(eq(users.email, email)).limit(1);
  const now = new Date();
  await inTransaction(async (tx) => {
    await tx
      .delete(mailTokens)
      .where(and(eq(mailTokens.userId, account.userId), eq(mailTokens.purpose, "address")));
    const by = { userId: account.userId, tokenId: null, origin: caller.address };
    await writeEntry(tx, { teamId: null }, by, { type: "address-change-asked", data: {} });
    const told = `Somebody, probably you, asked to change the address of your Lowlying account. It changes once the link in a letter to the new address is used.\n\nIf it was not you, change your password at once:\n${env().APP_ORIGIN}/account`;
    await queueMail(
      { recipient: account.email, subject: "Your Lowlying address is to change", body: told },
      tx,
    );
    if (known.length > 0) return;
    const address = await keepSecret(tx, account.userId, email, now);
    const body = `This address is to become that of a Lowlying account. This link works once, within ${CONFIRM_HOURS} hours:\n\n${address}\n\nIf you did not ask for it, leave it: nothing happens then.`;
    await queueMail({ recipient: email, subject: "Confirm your address for Lowlying", body }, tx);
  });
}

async function findChange(secret: string, on: Queryable, lock: boolean) {
  const query = on
    .select({ userId: users.id, before: users.email, data: mailTokens.data })
    .from(mailTokens)
    .innerJoin(users, and(eq(users.id, mailTokens.userId), isNull(users.disabledAt)))
    .where(
      and(
        eq(mailTokens.tokenSha, secretSha(secret)),
        eq(mailTokens.purpose, "address"),
        isNull(mailTokens.usedAt),
        gt(mailTokens.endsAt, new Date()),
      ),
    )
    .limit(1);
  const row = (await (lock ? query.for("update") : query))[0];
  const read = newAddress.safeParse(row?.data);
  return row === undefined || !read.success ? null : { ...row, email: read.data.email };
}

/** The address that a link would confirm; null once it has ended. Looking uses nothing up. */
export async function findAddressChange(secret: string): Promise<string | null> {
  return (await findChange(secret, db, false))?.email ?? null;
}

/**
 * Takes an address as the account's own: the new one, of which the old one is told, or the one it has had from the start.
 *
 * @throws DomainError not-found where the link has ended, conflict where the address was taken meanwhile
 */
export async function confirmAddress(options: { secret: string; caller: Caller }): Promise<void> {
  try {
    await inTransaction(async (tx) => {
      const change = await findChange(options.secret, tx, true);
      if (change === null) {
        throw new DomainError(
          "not-found",
          "This link has ended",
          "It was used, is older than a day, or a newer one was sent.",
        );
      }
      await tx
        .update(mailTokens)
        .set({ usedAt: new Date() })
        .where(eq(mailTokens.tokenSha, secretSha(options.secret)));
      await tx
        .update(users)
        .set({ email: change.email, confirmedAt: new Date() })
        .where(eq(users.id, change.userId));
      const by = { userId: change.userId, tokenId: null, origin: options.caller.address };
      if (change.email === change.before) {
        await writeEntry(tx, { teamId: null }, by, { type: "address-confirmed", data: {} });
        return;
      }
      await writeEntry(tx, { teamId: null }, by, { type: "address-changed", data: {} });
      const body =
        "The address of your Lowlying account was changed; letters go to the new one from now on.\n\nIf it was not you, tell an owner of your team at once.";
      await queueMail({ recipient: change.before, subject: "Your Lowlying address was changed", body }, tx);
    });
  } catch (error) {
    if (!isDuplicate(error)) throw error;
    throw new DomainError("conflict", "Not changed", "This address cannot be used. Choose another one.");
  }
}
