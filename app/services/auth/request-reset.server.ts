import { and, eq, isNull } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { mailTokens, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { inBackground } from "../background.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { newSecret, secretSha } from "./secret.server.ts";
import { type Caller, normalEmail, restingError } from "./sign-in.server.ts";
import { addressRange, takeAttempt } from "./throttle.server.ts";

export const RESET_MINUTES = 30;
const LETTERS_A_HOUR = 5;
const REQUESTS_IN_RANGE = 60;

async function sendLink(email: string, address: string): Promise<void> {
  const rows = await db
    .select({ id: users.id, demo: users.demo })
    .from(users)
    .where(and(eq(users.email, email), isNull(users.disabledAt)))
    .limit(1);
  const user = rows[0];
  if (user === undefined || (user.demo && env().public)) return;
  const wait = await takeAttempt({ kind: "reset", subject: email, limit: LETTERS_A_HOUR, seconds: 3600 });
  if (wait !== null) return;
  const secret = newSecret();
  const now = new Date();
  await inTransaction(async (tx) => {
    // The newest link alone works.
    await tx.delete(mailTokens).where(and(eq(mailTokens.userId, user.id), eq(mailTokens.purpose, "reset")));
    await tx.insert(mailTokens).values({
      tokenSha: secretSha(secret),
      userId: user.id,
      purpose: "reset",
      createdAt: now,
      endsAt: new Date(now.getTime() + RESET_MINUTES * 60_000),
    });
    await writeEntry(
      tx,
      { teamId: null },
      { userId: user.id, tokenId: null, origin: address },
      { type: "password-reset-asked", data: {} },
    );
    const body = `Somebody, probably you, asked to reset the password of your Lowlying account. This link works once, within ${RESET_MINUTES} minutes:\n\n${env().APP_ORIGIN}/reset-password/${secret}\n\nIf it was not you, leave it: nothing was changed.`;
    await queueMail({ recipient: email, subject: "Reset your Lowlying password", body }, tx);
  });
}

/**
 * Sends a link for a new password, if the address is known. The work goes on after the answer, so that neither its
 * words nor its time tell known from unknown.
 *
 * @throws DomainError too-many where a range asks too often
 */
export async function requestReset(options: { email: string; caller: Caller }): Promise<void> {
  const { address } = options.caller;
  const range = {
    kind: "reset-range",
    subject: addressRange(address),
    limit: REQUESTS_IN_RANGE,
    seconds: 3600,
  };
  const wait = await takeAttempt(range);
  if (wait !== null) throw restingError(wait);
  inBackground("password reset", () => sendLink(normalEmail(options.email), address));
}
