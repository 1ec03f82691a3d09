import { inTransaction } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { members, teams, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError, type Fault } from "../../lib/errors.ts";
import { askToConfirm } from "../account/change-address.server.ts";
import { forbidden } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { hashPassword } from "./hash-password.server.ts";
import { passwordFault } from "./password-rules.server.ts";
import { type Caller, normalEmail, restingError } from "./sign-in.server.ts";
import { addressRange, takeAttempt } from "./throttle.server.ts";

const SIGN_UPS_AN_HOUR = 60;

function check(name: string, email: string, password: string): void {
  const faults: Fault[] = [];
  if (name.length === 0 || name.length > 120) {
    faults.push({ field: "name", message: "Give a name of up to 120 characters, as the logbook shows it." });
  }
  if (!/^[^\s@]+@[^\s@.]+(\.[^\s@.]+)*$/.test(email)) {
    faults.push({
      field: "email",
      message: "This is no mail address; one looks like name@laboratory.example.",
    });
  }
  const wrong = passwordFault(password, email);
  if (wrong !== null) faults.push({ field: "password", message: wrong });
  if (faults.length > 0) {
    throw new DomainError("invalid", "Not signed up", "Some fields need another value.", { faults });
  }
}

/** Tells the owner of the address; whoever tried reads what everybody reads. */
function tellOwner(email: string): Promise<void> {
  return queueMail({
    recipient: email,
    subject: "Somebody tried to sign up with your address",
    body: `Somebody tried to open a Lowlying account with this address, which has one already. Nothing was changed.\n\nIf it was you, sign in, or reset the password:\n${env().APP_ORIGIN}/reset-password`,
  });
}

/**
 * Opens an account with a team of its own, owned by its user. A known address is answered alike, in words and in time:
 * both ways hash the password, send one letter and commit once, and nobody is signed in by this, since a session would
 * tell. The account works before its address is confirmed; its page says that it is not.
 *
 * @throws DomainError forbidden where sign-up is closed, invalid with `faults` by field
 */
export async function signUp(options: {
  name: string;
  email: string;
  password: string;
  caller: Caller;
}): Promise<void> {
  if (!env().OPEN_SIGN_UP) throw forbidden("Sign-up is by invitation here. Ask an owner of your team.");
  const name = options.name.trim();
  const email = normalEmail(options.email);
  check(name, email, options.password);
  const { address } = options.caller;
  const wait = await takeAttempt({
    kind: "sign-up",
    subject: addressRange(address),
    limit: SIGN_UPS_AN_HOUR,
    seconds: 3600,
  });
  if (wait !== null) throw restingError(wait);

  const passwordHash = await hashPassword(options.password);
  const [userId, teamId, createdAt] = [newId(), newId(), new Date()];
  const team = `${name.slice(0, 110)}'s team`;
  try {
    await inTransaction(async (tx) => {
      const by = { userId, tokenId: null, origin: address };
      await tx.insert(users).values({ id: userId, email, name, passwordHash, createdAt });
      await tx.insert(teams).values({ id: teamId, name: team, createdAt });
      await tx.insert(members).values({ teamId, userId, role: "owner", createdAt });
      await writeEntry(tx, { teamId }, by, { type: "sign-up", data: {} });
      await writeEntry(tx, { teamId }, by, { type: "team-made", data: { name: team } });
      await askToConfirm(tx, { userId, email }, createdAt);
    });
  } catch (error) {
    if (!isDuplicate(error)) throw error;
    await tellOwner(email);
  }
}
