import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { apiTokens, members, teams, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { TOKEN_PREFIX } from "./find-token.server.ts";
import { newSecret, secretSha } from "./secret.server.ts";

export interface NewToken {
  id: string;
  /** Shown once, kept nowhere. */
  token: string;
  prefix: string;
  endsAt: Date | null;
}

const DAY_MS = 86_400_000;

/**
 * Makes an API token. Callers have decided before that this user may have it (`accessTeam(actor, "tokens", ...)`,
 * or the command line on the machine itself).
 *
 * @param options.days until it ends; null for no end
 */
export async function makeToken(options: {
  teamId: string;
  userId: string;
  name: string;
  scope: "full" | "read" | "add";
  days: number | null;
  now?: Date;
}): Promise<NewToken> {
  const now = options.now ?? new Date();
  const token = TOKEN_PREFIX + newSecret();
  const made = {
    id: newId(),
    prefix: token.slice(0, TOKEN_PREFIX.length + 4),
    endsAt: options.days === null ? null : new Date(now.getTime() + options.days * DAY_MS),
  };
  await db.insert(apiTokens).values({
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
 * @throws DomainError not-found in words for the command line
 */
export async function makeTokenByEmail(options: {
  email: string;
  team?: string;
  scope: "full" | "read" | "add";
  days: number | null;
  name: string;
}): Promise<NewToken> {
  const email = options.email.trim().toLowerCase();
  const rows = await db
    .select({ userId: users.id, teamId: teams.id, teamName: teams.name })
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
  return makeToken({ ...options, teamId: row.teamId, userId: row.userId });
}
