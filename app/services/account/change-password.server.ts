import { and, eq, ne } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { sessions, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Actor } from "../auth/access.server.ts";
import { hashPassword } from "../auth/hash-password.server.ts";
import { passwordFault } from "../auth/password-rules.server.ts";
import type { Caller } from "../auth/sign-in.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { checkOwnPassword } from "./check-own-password.server.ts";

/**
 * Changes the password of who is signed in, and ends every other session.
 *
 * @throws DomainError invalid by field
 */
export async function changePassword(options: {
  actor: Actor;
  current: string;
  password: string;
  caller: Caller;
}): Promise<void> {
  const { actor, current, password, caller } = options;
  const account = await checkOwnPassword({ actor, password: current, caller });
  const wrong = passwordFault(password, account.email);
  if (wrong !== null) {
    throw new DomainError("invalid", "Not changed", wrong, {
      faults: [{ field: "password", message: wrong }],
    });
  }
  const passwordHash = await hashPassword(password);
  await inTransaction(async (tx) => {
    await tx.update(users).set({ passwordHash }).where(eq(users.id, account.userId));
    await tx
      .delete(sessions)
      .where(and(eq(sessions.userId, account.userId), ne(sessions.id, account.sessionId)));
    const by = { userId: account.userId, tokenId: null, origin: caller.address };
    await writeEntry(tx, { teamId: null }, by, { type: "password-changed", data: {} });
    const body =
      "The password of your Lowlying account was changed, and every other session was ended.\n\nIf it was not you, ask for a reset at once and tell an owner of your team.";
    await queueMail({ recipient: account.email, subject: "Your Lowlying password was changed", body }, tx);
  });
}
