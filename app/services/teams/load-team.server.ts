import { eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { teams } from "../../db/schema.server.ts";
import { type Actor, accessTeam, type MemberRole, roleMay } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";

export interface TeamView {
  id: string;
  name: string;
  role: MemberRole;
  /** True where the person may take in, compute, hold and release. */
  mayCompute: boolean;
  /** Longest life of a read-only link, days. */
  linkDays: number;
}

/** Head of a team's pages. */
export async function loadTeam(actor: Actor, teamId: string): Promise<TeamView> {
  const grant = await accessTeam(actor, "read", teamId);
  const rows = await db
    .select({ name: teams.name, linkDays: teams.linkDays })
    .from(teams)
    .where(eq(teams.id, grant.teamId))
    .limit(1);
  const row = rows[0];
  if (row === undefined || grant.role === "guest") throw notFound();
  return { ...row, id: grant.teamId, role: grant.role, mayCompute: roleMay(grant.role, "compute") };
}
