import { and, asc, desc, eq, gt, isNull, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { apiTokens, invitations, members, sessions, users } from "../../db/schema.server.ts";
import { type Actor, accessTeam, type MemberRole, roleMay } from "../auth/access.server.ts";

export interface MemberRow {
  id: string;
  name: string;
  email: string;
  role: MemberRole;
  you: boolean;
  /** The only owner: cannot leave, cannot become less. */
  lastOwner: boolean;
  /** Has tokens in the team and no open session. */
  tokensOnly: boolean;
  since: string;
  /** Owners see these two of everybody, others of themselves. */
  seenAt: string | null;
  sessions: number | null;
}

export interface InvitationRow {
  id: string;
  email: string;
  role: MemberRole;
  createdAt: string;
  endsAt: string;
  by: string | null;
}

export interface PeopleView {
  mayManage: boolean;
  members: MemberRow[];
  /** Waiting ones; empty for who may not manage. */
  invitations: InvitationRow[];
  /** Tokens of the team that work now. */
  tokens: number;
}

const isoOrNull = (value: Date | string | null): string | null => {
  if (value === null) return null;
  return (value instanceof Date ? value : new Date(`${value.replace(" ", "T")}Z`)).toISOString();
};

/** Members of a team with their roles, and the invitations that wait. Every member sees the members. */
export async function listPeople(options: { actor: Actor; teamId: string; now?: Date }): Promise<PeopleView> {
  const grant = await accessTeam(options.actor, "read", options.teamId);
  const now = options.now ?? new Date();
  const mayManage = options.actor.kind === "user" && roleMay(grant.role, "manage");
  const living = and(
    isNull(apiTokens.revokedAt),
    sql`(${apiTokens.endsAt} is null or ${apiTokens.endsAt} > ${now})`,
  );
  const rows = await db
    .select({
      id: users.id,
      name: users.name,
      email: users.email,
      role: members.role,
      since: members.createdAt,
      seenAt: sql<
        Date | string | null
      >`(select max(${sessions.seenAt}) from ${sessions} where ${sessions.userId} = ${users.id})`,
      sessions: sql<number>`(select count(*) from ${sessions} where ${sessions.userId} = ${users.id} and ${sessions.endsAt} > ${now})`,
      tokens: sql<number>`(select count(*) from ${apiTokens} where ${apiTokens.userId} = ${users.id} and ${apiTokens.teamId} = ${members.teamId} and ${living})`,
    })
    .from(members)
    .innerJoin(users, and(eq(users.id, members.userId), isNull(users.disabledAt)))
    .where(eq(members.teamId, grant.teamId))
    .orderBy(
      sql`field(${members.role}, 'owner', 'analyst', 'reader')`,
      asc(members.createdAt),
      asc(users.id),
    );
  const owners = rows.filter((row) => row.role === "owner").length;
  return {
    mayManage,
    members: rows.map((row) => {
      const you = row.id === grant.userId;
      const shown = mayManage || you;
      return {
        id: row.id,
        name: row.name,
        email: row.email,
        role: row.role,
        you,
        lastOwner: row.role === "owner" && owners === 1,
        tokensOnly: Number(row.tokens) > 0 && Number(row.sessions) === 0,
        since: row.since.toISOString(),
        seenAt: shown ? isoOrNull(row.seenAt) : null,
        sessions: shown ? Number(row.sessions) : null,
      };
    }),
    invitations: mayManage ? await waiting(grant.teamId, now) : [],
    tokens: await db.$count(apiTokens, and(eq(apiTokens.teamId, grant.teamId), living)),
  };
}

async function waiting(teamId: string, now: Date): Promise<InvitationRow[]> {
  const rows = await db
    .select({
      id: invitations.id,
      email: invitations.email,
      role: invitations.role,
      createdAt: invitations.createdAt,
      endsAt: invitations.endsAt,
      by: users.name,
    })
    .from(invitations)
    .leftJoin(users, eq(users.id, invitations.createdBy))
    .where(
      and(
        eq(invitations.teamId, teamId),
        isNull(invitations.usedAt),
        isNull(invitations.revokedAt),
        gt(invitations.endsAt, now),
      ),
    )
    .orderBy(desc(invitations.createdAt));
  return rows.map((row) => ({
    ...row,
    createdAt: row.createdAt.toISOString(),
    endsAt: row.endsAt.toISOString(),
  }));
}
