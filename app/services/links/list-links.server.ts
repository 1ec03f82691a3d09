import { and, desc, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { editions, links } from "../../db/schema.server.ts";
import type { LinkRow } from "../../lib/edition/views.ts";

/** Links to the editions of an ensemble, newest first, ended ones too. Access has been decided before. */
export async function findLinks(teamId: string, ensembleId: string, now: Date): Promise<LinkRow[]> {
  const rows = await db
    .select({
      id: links.id,
      edition: editions.number,
      label: links.label,
      sources: links.sources,
      logbook: links.logbook,
      createdAt: links.createdAt,
      endsAt: links.endsAt,
      revokedAt: links.revokedAt,
      opened: links.opened,
      openedAt: links.openedAt,
    })
    .from(links)
    .innerJoin(editions, eq(editions.id, links.editionId))
    .where(and(eq(links.teamId, teamId), eq(editions.ensembleId, ensembleId)))
    .orderBy(desc(links.createdAt), desc(links.id));
  return rows.map(({ createdAt, endsAt, revokedAt, openedAt, ...row }) => ({
    ...row,
    createdAt: createdAt.toISOString(),
    endsAt: (revokedAt ?? endsAt).toISOString(),
    state: revokedAt !== null ? "ended by hand" : endsAt <= now ? "ended" : "live",
    openedAt: openedAt?.toISOString() ?? null,
  }));
}
