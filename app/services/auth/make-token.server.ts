import { and, asc, eq, isNull } from "drizzle-orm";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { apiTokens, members, teams, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { forbidden } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { TOKEN_PREFIX } from "./find-token.server.ts";
import { newSecret, secretSha } from "./secret.server.ts";

export interface NewToken {
  id: string;
  /** Shown once, kept nowhere. */
  token: string;
  prefix: string;
  endsAt: Date;
}

const DAY_MS = 86_400_000;
/** Days after which a token ends unless somebody says otherwise, and the most that can be said. */
export const TOKEN_DAYS = { usual: 30, most: 366 };

/**
 * Makes an API token. Callers have decided before that this user may have it (`accessTeam(actor, "tokens", ...)`,
 * or the command line on the machine itself).
 *
 * @param options.days until it ends; there is none without an end
 */
export async function makeToken(options: {
  teamId: string;
  userId: string;
  name: string;
  scope: "full" | "read" | "add";
  days: number;
  now?: Date;
  /** The transaction of the act, where there is more to it. */
  on?: Queryable;
}): Promise<NewToken> {
  const now = options.now ?? new Date();
  const token = TOKEN_PREFIX + newSecret();
  const made = {
    id: newId(),
    prefix: token.slice(0, TOKEN_PREFIX.length + 4),
    endsAt: new Date(now.getTime() + options.days * DAY_MS),
  };
  await (options.on ?? db).insert(apiTokens).values({
    ...made,
    teamId: options.teamId,
    userId: options.userId,
    name: options.name,
    tokenSha: secretSha(token),
    scope: options.scope,
    createdAt: now,
  });
  return { ...made, token };
}

/**
 * Makes a token for whoever can already read the database: the command `npm run token`.
 *
 * @param options.team id or name; without it the first team that the user joined
 * @param options.scope the most that the user's role allows, unless said otherwise
 * @throws DomainError in words for the command line: no such user or team, a scope beyond a reader's
 */
export async function makeTokenByEmail(options: {
  email: string;
  team?: string;
  scope?: "full" | "read" | "add";
  days?: number;
  name: string;
}): Promise<NewToken> {
  const email = options.email.trim().toLowerCase();
  const rows = await db
    .select({ userId: users.id, teamId: teams.id, teamName: teams.name, role: members.role })
    .from(users)
    .leftJoin(members, eq(members.userId, users.id))
    .leftJoin(teams, and(eq(teams.id, members.teamId), isNull(teams.deletedAt)))
    .where(and(eq(users.email, email), isNull(users.disabledAt)))
    .orderBy(asc(members.createdAt), asc(teams.id));
  if (rows.length === 0)
    throw new DomainError("not-found", "No such user", `No user has the address ${email}.`);
  const wanted = options.team;
  const row = rows.find(
    (one) =>
      one.teamId !== null && (wanted === undefined || one.teamId === wanted || one.teamName === wanted),
  );
  if (row?.teamId == null) {
    const of = wanted === undefined ? "any team" : `a team "${wanted}"`;
    throw new DomainError("not-found", "No such team", `${email} is not in ${of}.`);
  }
  const scope = options.scope ?? (row.role === "reader" ? "read" : "full");
  if (row.role === "reader" && scope !== "read") {
    throw forbidden(
      `${email} is a reader of ${row.teamName}: a reader's token may only read (--scope read).`,
    );
  }
  const { userId, teamId } = row;
  const { name, days = TOKEN_DAYS.usual } = options;
  return inTransaction(async (tx) => {
    const made = await makeToken({ teamId, userId, name, scope, days, on: tx });
    // Nobody of the team did it; the entry says whose it is.
    await writeEntry(
      tx,
      { teamId },
      { userId: null, tokenId: null },
      {
        type: "token-made",
        data: {
          prefix: made.prefix,
          name: `${name}, for ${email}`,
          scope,
          endsAt: made.endsAt.toISOString(),
        },
      },
    );
    return made;
  });
}
