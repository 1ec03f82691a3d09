import type { Letter } from "./queue-mail.server.ts";

// No letter names a compound, a file, a structure or what a person called something of their work.

/** Where the switches for letters are. */
const SWITCH = "Such letters can be switched off on the page of your account.";

/** Asks the owner of an address to confirm it. */
export function confirmLetter(options: { recipient: string; address: string; hours: number }): Letter {
  const { recipient, address, hours } = options;
  return {
    recipient,
    subject: "Confirm your address for Lowlying",
    body: `A Lowlying account was opened with this address. This link confirms that it is yours; it works once, within ${hours} hours:\n\n${address}\n\nIf you opened no account, leave it: whoever did cannot read your letters.`,
  };
}

/** Tells of a token that was made or ended. */
export function tokenLetter(options: {
  recipient: string;
  team: string;
  prefix: string;
  what: "made" | "revoked";
  address: string;
}): Letter {
  const { recipient, team, prefix, what, address } = options;
  const made = `A token for programs that begins with ${prefix} was made in your name for the team ${team}.\n\nIf it was not you, revoke it and change your password at once:\n${address}`;
  const revoked = `The token that begins with ${prefix}, in your name for the team ${team}, was revoked. Programs that use it are refused from now on.`;
  return {
    recipient,
    subject: what === "made" ? "A token was made for your Lowlying account" : "A token of yours was revoked",
    body: what === "made" ? made : revoked,
  };
}

/** Hands a read-only link to the person it was made for. */
export function linkLetter(options: { recipient: string; by: string; address: string; day: string }): Letter {
  const { recipient, by, address, day } = options;
  return {
    recipient,
    subject: `${by} made a read-only link for you on Lowlying`,
    body: `${by} shares results with you. They are read in a browser, without an account, until ${day}:\n\n${address}\n\nWhoever has this address sees what it shows: pass it on with care. If you do not know ${by}, leave it.`,
  };
}

/** Tells whoever waited that long work is over. */
export function workLetter(options: {
  recipient: string;
  work: "intake" | "sift" | "table of pair distances";
  ended: "done" | "failed";
  minutes: number;
  address: string | null;
}): Letter {
  const { recipient, work, ended, minutes, address } = options;
  const how = ended === "done" ? "is done" : "failed";
  const article = work === "intake" ? "An" : "A";
  const where =
    address === null
      ? "What sent the files was told why; nothing of them was kept."
      : `${ended === "done" ? "The result stands" : "What was found stands"} here:\n\n${address}`;
  return {
    recipient,
    subject: `Your ${work} on Lowlying ${how}`,
    body: `${article} ${work} of yours ${how} after ${minutes} minutes. ${where}\n\n${SWITCH}`,
  };
}

/** What happened in a person's teams within a week, in counts alone. */
export function digestLetter(options: {
  recipient: string;
  teams: readonly { name: string; counts: readonly string[] }[];
  address: string;
}): Letter {
  const { recipient, teams, address } = options;
  const lines = teams.map(({ name, counts }) => `${name}: ${counts.join(", ")}`);
  return {
    recipient,
    subject: "The week in your Lowlying teams",
    body: `In the last seven days:\n\n${lines.join("\n")}\n\n${address}\n\n${SWITCH}`,
  };
}
