import { and, eq, isNotNull } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { members, teams, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Actor } from "../auth/access.server.ts";
import { findPerson, type TeamOfPerson } from "../teams/find-person.server.ts";
import { ownAccount } from "./check-own-password.server.ts";
import { listSessions, type SessionRow } from "./sessions.server.ts";
import { UNDO_DAYS } from "./undo-days.ts";

const DAY_MS = 86_400_000;

/** The letters that a person may want or not; those of safety always go. */
export interface Letters {
  jobs: boolean;
  links: boolean;
  digest: boolean;
}

export interface AccountView {
  name: string;
  email: string;
  /** False until a letter to the address was answered. */
  confirmed: boolean;
  letters: Letters;
  teams: TeamOfPerson[];
  sessions: SessionRow[];
  /** Deleted teams that this person, an owner, can bring back, with the day until when. */
  deletedTeams: { id: string; name: string; until: string }[];
}

/** The account of who is signed in, as its page shows it. */
export async function loadAccount(actor: Actor): Promise<AccountView> {
  const account = await ownAccount(actor);
  const [person, sessions, gone, letters] = await Promise.all([
    findPerson(actor),
    listSessions({ actor }),
    db
      .select({ id: teams.id, name: teams.name, deletedAt: teams.deletedAt })
      .from(members)
      .innerJoin(teams, and(eq(teams.id, members.teamId), isNotNull(teams.deletedAt)))
      .where(and(eq(members.userId, account.userId), eq(members.role, "owner"))),
    db
      .select({ jobs: users.jobLetters, links: users.linkLetters, digest: users.digest })
      .from(users)
      .where(eq(users.id, account.userId)),
  ]);
  return {
    name: account.name,
    email: account.email,
    confirmed: account.confirmed,
    letters: letters[0] ?? { jobs: true, links: true, digest: false },
    teams: person?.teams ?? [],
    sessions,
    deletedTeams: gone.flatMap(({ id, name, deletedAt }) =>
      deletedAt === null
        ? []
        : [{ id, name, until: new Date(deletedAt.getTime() + UNDO_DAYS * DAY_MS).toISOString() }],
    ),
  };
}

/** Changes the name that the logbook shows; rows of the past show the new one too. */
export async function renameSelf(options: { actor: Actor; name: string }): Promise<void> {
  const account = await ownAccount(options.actor);
  const name = options.name.trim();
  if (name.length === 0 || name.length > 120) {
    const message = "Give a name of up to 120 characters, as the logbook shows it.";
    throw new DomainError("invalid", "Not changed", message, { faults: [{ field: "name", message }] });
  }
  await inTransaction((tx) => tx.update(users).set({ name }).where(eq(users.id, account.userId)));
}

/** Sets which letters somebody wants. The first week of the digest begins with the asking. */
export async function chooseLetters(options: { actor: Actor; letters: Letters; now?: Date }): Promise<void> {
  const { userId } = await ownAccount(options.actor);
  const { jobs, links, digest } = options.letters;
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ digest: users.digest })
      .from(users)
      .where(eq(users.id, userId))
      .for("update");
    const begins = digest && rows[0]?.digest === false;
    await tx
      .update(users)
      .set({
        ...{ jobLetters: jobs, linkLetters: links, digest },
        ...(begins ? { digestAt: options.now ?? new Date() } : {}),
      })
      .where(eq(users.id, userId));
  });
}
