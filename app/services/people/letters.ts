import type { Letter } from "../mail/queue-mail.server.ts";

// Mails name teams and people, never a compound, a file or a structure.

const ROLE_WORDS = {
  owner: "an owner, who decides on people and deletion too",
  analyst: "an analyst, who takes in files, computes, freezes and shares",
  reader: "a reader, who sees all of the team and changes nothing",
} as const;

/** Invites somebody into a team. */
export function invitationLetter(options: {
  recipient: string;
  team: string;
  by: string;
  role: keyof typeof ROLE_WORDS;
  address: string;
  days: number;
}): Letter {
  const { recipient, team, by, role, address, days } = options;
  return {
    recipient,
    subject: `${by} invites you to the team ${team} on Lowlying`,
    body: `${by} invites you to the team ${team} as ${ROLE_WORDS[role]}. This link works once, within ${days} days:\n\n${address}\n\nIf you do not know ${by}, leave it: nothing happens then.`,
  };
}

/** Tells somebody of a new role. */
export function roleLetter(options: { recipient: string; team: string; role: string }): Letter {
  const { recipient, team, role } = options;
  return {
    recipient,
    subject: `Your role in the team ${team} on Lowlying`,
    body: `Your role in the team ${team} is now: ${role}. It counts from the next thing you do there.`,
  };
}

/** Tells somebody that a team no longer holds them. */
export function removedLetter(options: { recipient: string; team: string }): Letter {
  const { recipient, team } = options;
  return {
    recipient,
    subject: `You are no longer in the team ${team} on Lowlying`,
    body: `An owner removed you from the team ${team}. Your tokens of that team have ended; your account stays.`,
  };
}

/** Tells the owners that a team was deleted, and until when it can be brought back. */
export function teamDeletedLetter(options: {
  recipient: string;
  team: string;
  by: string;
  until: string;
  address: string;
}): Letter {
  const { recipient, team, by, until, address } = options;
  return {
    recipient,
    subject: `The team ${team} was deleted on Lowlying`,
    body: `${by} deleted the team ${team} with all it holds. Until ${until} an owner can bring it back:\n\n${address}\n\nAfterwards it is gone for good.`,
  };
}
