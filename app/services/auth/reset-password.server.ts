import { and, eq, gt, isNull, sql } from "drizzle-orm";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { mailTokens, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { endSessionsOf } from "./end-session.server.ts";
import { hashPassword } from "./hash-password.server.ts";
import { passwordFault } from "./password-rules.server.ts";
import { secretSha } from "./secret.server.ts";
import { type Caller, signInThrottle } from "./sign-in.server.ts";
import { clearAttempts } from "./throttle.server.ts";

async function findReset(secret: string, on: Queryable, lock: boolean) {
  const query = on
    .select({ userId: users.id, email: users.email })
    .from(mailTokens)
    .innerJoin(users, and(eq(users.id, mailTokens.userId), isNull(users.disabledAt)))
    .where(
      and(
        eq(mailTokens.tokenSha, secretSha(secret)),
        eq(mailTokens.purpose, "reset"),
        isNull(mailTokens.usedAt),
        gt(mailTokens.endsAt, new Date()),
      ),
    )
    .limit(1);
  const rows = await (lock ? query.for("update") : query);
  return rows[0] ?? null;
}

/** True while a link can still be used. Looking uses nothing up: mail programs open links too. */
export async function isResetOpen(secret: string): Promise<boolean> {
  return (await findReset(secret, db, false)) !== null;
}

const ended = () =>
  new DomainError(
    "not-found",
    "This link has ended",
    "It was used, is older than 30 minutes, or a newer one was sent. Ask for another.",
  );

/**
 * Sets a new password by the secret of a mailed link, which then is used up, and ends every session of the user.
 *
 * @throws DomainError not-found for a link that has ended, invalid with a fault where the password will not do
 */
export async function resetPassword(options: {
  secret: string;
  password: string;
  caller: Caller;
}): Promise<void> {
  const known = await findReset(options.secret, db, false);
  if (known === null) throw ended();
  const wrong = passwordFault(options.password, known.email);
  if (wrong !== null) {
    throw new DomainError("invalid", "Not changed", wrong, {
      faults: [{ field: "password", message: wrong }],
    });
  }
  const passwordHash = await hashPassword(options.password);
  await inTransaction(async (tx) => {
    const reset = await findReset(options.secret, tx, true);
    if (reset === null) throw ended();
    // The letter proves the address as well.
    const confirmedAt = sql`coalesce(${users.confirmedAt}, utc_timestamp(3))`;
    await tx.update(users).set({ passwordHash, confirmedAt }).where(eq(users.id, reset.userId));
    await tx
      .update(mailTokens)
      .set({ usedAt: new Date() })
      .where(eq(mailTokens.tokenSha, secretSha(options.secret)));
    await endSessionsOf(reset.userId, tx);
    await writeEntry(
      tx,
      { teamId: null },
      { userId: reset.userId, tokenId: null, origin: options.caller.address },
      { type: "password-changed", data: {} },
    );
    const body =
      "The password of your Lowlying account was changed, and every open session was ended.\n\nIf it was not you, ask for a reset at once and tell an owner of your team.";
    await queueMail({ recipient: reset.email, subject: "Your Lowlying password was changed", body }, tx);
  });
  // Whoever forgot the password has likely tried some.
  await clearAttempts(signInThrottle(known.email, options.caller.address));
}
