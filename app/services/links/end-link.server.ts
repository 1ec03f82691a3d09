import { eq } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { editions, links } from "../../db/schema.server.ts";
import { type Actor, accessLink } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { type Doer, writeEntry } from "../logbook/write-entry.server.ts";

/** Ends a link at once; one that has ended stays as it is. Access has been decided before. */
export async function endLinkFor(
  at: Doer & { teamId: string; ensembleId: string; linkId: string },
): Promise<void> {
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({
        prefix: links.prefix,
        label: links.label,
        revokedAt: links.revokedAt,
        endsAt: links.endsAt,
        number: editions.number,
      })
      .from(links)
      .innerJoin(editions, eq(editions.id, links.editionId))
      .where(eq(links.id, at.linkId))
      .for("update");
    const link = rows[0];
    if (link === undefined) throw notFound();
    const now = new Date();
    if (link.revokedAt !== null || link.endsAt <= now) return;
    await tx.update(links).set({ revokedAt: now }).where(eq(links.id, at.linkId));
    const { number, prefix, label } = link;
    await writeEntry(tx, at, at, { type: "link-ended", data: { number, prefix, label } });
  });
}

/** Ends a link as a person. */
export async function endLink(options: { actor: Actor; linkId: string }): Promise<void> {
  await endLinkFor(await accessLink(options.actor, "share", options.linkId));
}
