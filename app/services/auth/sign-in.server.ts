import { and, eq, isNull } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { hashPassword, verifyPassword } from "./hash-password.server.ts";
import { startSession } from "./start-session.server.ts";
import { addressRange, clearAttempts, type Throttle, takeAttempt } from "./throttle.server.ts";

const REST_SECONDS = 15 * 60;
const WRONG_PASSWORDS = 10;
/** Of one range over all accounts: stops a list of passwords from being tried on one account after the other. */
const WRONG_IN_RANGE = 100;

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
    await writeEntry(tx, { teamId: null }, by, { type: "sign-in", data: {} });
    return startSession({ userId: account.id, stay: options.stay, userAgent }, tx);
  });
  await clearAttempts(throttle);
  return { userId: account.id, secret };
}
