import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { members, teams, users } from "../../db/schema.server.ts";
import type { Actor, MemberRole } from "../auth/access.server.ts";

export interface TeamOfPerson {
  id: string;
  name: string;
  role: MemberRole;
}

export interface Person {
  name: string;
  email: string;
  /** In order of joining; the first is where `/teams` leads. */
  teams: TeamOfPerson[];
}

/** Who is signed in, with their teams, for the shell of every page; null for everybody else. */
export async function findPerson(actor: Actor): Promise<Person | null> {
  if (actor.kind !== "user") return null;
  const rows = await db
    .select({ name: users.name, email: users.email, id: teams.id, team: teams.name, role: members.role })
    .from(users)
    .leftJoin(members, eq(members.userId, users.id))
    .leftJoin(teams, and(eq(teams.id, members.teamId), isNull(teams.deletedAt)))
    .where(and(eq(users.id, actor.userId), isNull(users.disabledAt)))
    .orderBy(asc(members.createdAt), asc(teams.id));
  const first = rows[0];
  if (first === undefined) return null;
  const of = rows.flatMap(({ id, team, role }) =>
    id !== null && team !== null && role !== null ? [{ id, name: team, role }] : [],
  );
  return { name: first.name, email: first.email, teams: of };
}
