import { and, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Actor } from "../auth/access.server.ts";
import { verifyPassword } from "../auth/hash-password.server.ts";
import { type Caller, restingError, signInThrottle } from "../auth/sign-in.server.ts";
import { clearAttempts, takeAttempt } from "../auth/throttle.server.ts";
import { forbidden } from "../http.server.ts";

export interface OwnAccount {
  userId: string;
  sessionId: string;
  email: string;
  name: string;
  /** The address was confirmed by a letter. */
  confirmed: boolean;
}

/** Whose account it is; accounts are a person's alone, whatever a token may do. */
export async function ownAccount(actor: Actor): Promise<OwnAccount & { passwordHash: string }> {
  if (actor.kind !== "user") throw forbidden("An account belongs to who is signed in.");
  const rows = await db
    .select({
      email: users.email,
      name: users.name,
      passwordHash: users.passwordHash,
      confirmedAt: users.confirmedAt,
    })
    .from(users)
    .where(and(eq(users.id, actor.userId), isNull(users.disabledAt)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw forbidden("This account is closed.");
  const { confirmedAt, ...person } = row;
  const { userId, sessionId } = actor;
  return { ...person, confirmed: confirmedAt !== null, userId, sessionId };
}

/**
 * Asks for the password again before something that a borrowed session must not do.
 *
 * @throws DomainError invalid with a fault at `field`, too-many after ten wrong ones
 */
export async function checkOwnPassword(options: {
  actor: Actor;
  password: string;
  caller: Caller;
  field?: string;
}): Promise<OwnAccount> {
  const { passwordHash, ...account } = await ownAccount(options.actor);
  const throttle = signInThrottle(account.email, options.caller.address);
  const wait = await takeAttempt(throttle);
  if (wait !== null) throw restingError(wait);
  const { right } = await verifyPassword(passwordHash, options.password.slice(0, 1000));
  if (!right) {
    const message = "This is not your password.";
    throw new DomainError("invalid", "Not changed", message, {
      faults: [{ field: options.field ?? "current", message }],
    });
  }
  await clearAttempts(throttle);
  return account;
}
