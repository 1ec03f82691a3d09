import { createHash } from "node:crypto";
import { and, desc, eq, isNull } from "drizzle-orm";
import { z } from "zod";
import { db, inTransaction, type Transaction } from "../../db/client.server.ts";
import { logbook, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { browserWords } from "../account/browser-words.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { hashPassword, verifyPassword } from "./hash-password.server.ts";
import { startSession } from "./start-session.server.ts";
import { addressRange, clearAttempts, type Throttle, takeAttempt } from "./throttle.server.ts";

const REST_SECONDS = 15 * 60;
const WRONG_PASSWORDS = 10;
/** Of one range over all accounts: stops a list of passwords from being tried on one account after the other. */
const WRONG_IN_RANGE = 100;
const SIGN_INS_LOOKED_AT = 200;
const signInData = z.object({ browser: z.string().optional() });

export interface Caller {
  /** Address as TRUST_PROXY gives it. */
  address: string;
  userAgent: string | null;
}

/** Addresses are compared in one form. */
export function normalEmail(email: string): string {
  return email.trim().toLowerCase().slice(0, 254);
}

/** Counts a sign-in of one account from one range: its owner elsewhere is not held up. */
export function signInThrottle(email: string, address: string): Throttle {
  return {
    kind: "sign-in",
    subject: `${normalEmail(email)} ${addressRange(address)}`,
    limit: WRONG_PASSWORDS,
    seconds: REST_SECONDS,
  };
}

function rangeThrottle(address: string): Throttle {
  return {
    kind: "sign-in-range",
    subject: addressRange(address),
    limit: WRONG_IN_RANGE,
    seconds: REST_SECONDS,
  };
}

/** A refusal for too many attempts, in words and with the time to wait. */
export function restingError(seconds: number): DomainError {
  const minutes = Math.ceil(seconds / 60);
  return new DomainError(
    "too-many",
    "Too many tries",
    `There were too many tries from here. Wait ${minutes === 1 ? "a minute" : `${minutes} minutes`}, or reset the password.`,
    { extra: { retryAfter: seconds } },
  );
}

/** Enough of a checksum to know a browser again, too little to be of use elsewhere. */
const browserMark = (userAgent: string) =>
  createHash("sha256").update(userAgent, "utf8").digest("hex").slice(0, 12);

/** Writes the sign-in down, and tells the person by mail where it comes from a browser that was never used before. */
async function noteSignIn(
  tx: Transaction,
  by: { userId: string; tokenId: null; origin: string },
  email: string,
  userAgent: string | null,
): Promise<void> {
  const browser = userAgent === null ? undefined : browserMark(userAgent);
  const before = await tx
    .select({ data: logbook.data })
    .from(logbook)
    .where(and(eq(logbook.userId, by.userId), eq(logbook.type, "sign-in")))
    .orderBy(desc(logbook.id))
    .limit(SIGN_INS_LOOKED_AT);
  await writeEntry(tx, { teamId: null }, by, { type: "sign-in", data: { browser } });
  const marks = before.map(({ data }) => signInData.safeParse(data).data?.browser);
  // Sign-ins of before browsers were noted tell nothing either way.
  const known = marks.filter((mark) => mark !== undefined);
  if (browser === undefined || known.length === 0 || known.includes(browser)) return;
  const body = `Your Lowlying account was signed in to from a browser that was not used before: ${browserWords(userAgent)}.\n\nIf it was not you, change your password at once; it ends every other session:\n${env().APP_ORIGIN}/account`;
  await queueMail({ recipient: email, subject: "A sign-in from a new browser on Lowlying", body }, tx);
}

interface Account {
  id: string;
  passwordHash: string;
  demo: boolean;
}

async function findAccount(email: string): Promise<Account | null> {
  const rows = await db
    .select({ id: users.id, passwordHash: users.passwordHash, demo: users.demo })
    .from(users)
    .where(and(eq(users.email, email), isNull(users.disabledAt)))
    .limit(1);
  const account = rows[0];
  // Demo accounts have a password that was printed: in production they are no accounts at all.
  return account === undefined || (account.demo && env().public) ? null : account;
}

/**
 * Checks address and password. The answer is the same, in words and in time, for an unknown address and for a wrong
 * password.
 *
 * @returns the secret of a new session
 * @throws DomainError invalid where they do not belong together, too-many while the account rests
 */
export async function signIn(options: {
  email: string;
  password: string;
  stay: boolean;
  caller: Caller;
}): Promise<{ userId: string; secret: string }> {
  const email = normalEmail(options.email);
  const { address, userAgent } = options.caller;
  const throttle = signInThrottle(email, address);
  const wait = (await takeAttempt(throttle)) ?? (await takeAttempt(rangeThrottle(address)));
  if (wait !== null) throw restingError(wait);

  const account = await findAccount(email);
  const { right, stale } = await verifyPassword(
    account?.passwordHash ?? null,
    options.password.slice(0, 1000),
  );
  const by = { userId: account?.id ?? null, tokenId: null, origin: address };
  if (account === null || !right) {
    await writeEntry(db, { teamId: null }, by, { type: "sign-in-failed", data: {} });
    throw new DomainError(
      "invalid",
      "Not signed in",
      "This address and this password do not belong together. Check both, or reset the password.",
    );
  }
  const renewed = stale ? await hashPassword(options.password) : null;
  const secret = await inTransaction(async (tx) => {
    if (renewed !== null) {
      await tx.update(users).set({ passwordHash: renewed }).where(eq(users.id, account.id));
    }
    await noteSignIn(tx, { ...by, userId: account.id }, email, userAgent);
    return startSession({ userId: account.id, stay: options.stay, userAgent }, tx);
  });
  await clearAttempts(throttle);
  return { userId: account.id, secret };
}
