import { and, eq, isNull } from "drizzle-orm";
import type { Transaction } from "../../db/client.server.ts";
import { members, teams, users } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { MemberRole } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";

export interface LockedMember {
  userId: string;
  role: MemberRole;
  name: string;
  email: string;
}

/**
 * The members of a team, with the team's row locked to the end of the transaction: two changes of people wait for each
 * other, so that two owners cannot remove one another at the same moment.
 */
export async function lockMembers(
  tx: Transaction,
  teamId: string,
): Promise<{ team: string; members: LockedMember[] }> {
  const found = await tx
    .select({ name: teams.name })
    .from(teams)
    .where(and(eq(teams.id, teamId), isNull(teams.deletedAt)))
    .for("update");
  const team = found[0];
  if (team === undefined) throw notFound();
  const rows = await tx
    .select({ userId: members.userId, role: members.role, name: users.name, email: users.email })
    .from(members)
    .innerJoin(users, and(eq(users.id, members.userId), isNull(users.disabledAt)))
    .where(eq(members.teamId, teamId));
  return { team: team.name, members: rows };
}

/**
 * Refuses to take the last owner away.
 *
 * @throws DomainError conflict
 */
export function keepAnOwner(people: readonly LockedMember[], without: string): void {
  if (people.some((person) => person.role === "owner" && person.userId !== without)) return;
  throw new DomainError(
    "conflict",
    "The last owner stays",
    "A team has at least one owner. Make somebody else an owner first.",
  );
}

/** The owner whose act this is must still be one, now that everybody else waits. */
export function stillOwner(people: readonly LockedMember[], userId: string | null): void {
  if (people.some((person) => person.userId === userId && person.role === "owner")) return;
  throw new DomainError("forbidden", "Not allowed", "Only an owner of the team may do this.");
}
