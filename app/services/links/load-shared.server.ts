import { and, asc, eq, inArray, lte, or, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { editions, ensembleFiles, logbook, sources } from "../../db/schema.server.ts";
import type { EditionView } from "../../lib/edition/views.ts";
import { logbookEntrySchema } from "../../lib/logbook/entries.ts";
import { describeShared, OWN_KINDS, SHARED_KINDS } from "../../lib/logbook/shared.ts";
import { escapeLines } from "../../lib/text/escape.ts";
import { accessBySecret, type LinkGrant } from "../auth/access.server.ts";
import { toEditionView } from "../editions/edition-view.server.ts";
import { findEdition, findPositions, lastVerification } from "../editions/find-edition.server.ts";
import { type EditionDownload, openEditionFile } from "../editions/open-edition-file.server.ts";
import { readSource } from "../ensembles/source-writer.server.ts";
import { notFound } from "../http.server.ts";
import { whileAllowed } from "../while-allowed.ts";
import { linkSha } from "./link-secret.ts";
import { noteExport, noteOpening, openLink, openLiveLink } from "./open-link.server.ts";

/** A line of the edition's part of the logbook: what was decided and when, by nobody's name. */
export interface SharedEntry {
  at: string;
  by: "person" | "token" | "product";
  text: string;
  detail: string | null;
}

export type SharedPage =
  | { live: true; edition: EditionView; endsAt: string; entries: SharedEntry[] | null }
  | { live: false; endedAt: string; contact: string };

const MOST_ENTRIES = 300;

/** What was decided up to the edition, and that it was frozen. */
async function sharedEntries(
  grant: LinkGrant,
  edition: { number: number; createdAt: Date },
): Promise<SharedEntry[]> {
  const decided = and(inArray(logbook.type, [...SHARED_KINDS]), lte(logbook.createdAt, edition.createdAt));
  const frozen = and(
    inArray(logbook.type, [...OWN_KINDS]),
    sql`json_value(${logbook.data}, '$.number') = ${edition.number}`,
  );
  const rows = await db
    .select({
      at: logbook.createdAt,
      userId: logbook.userId,
      tokenId: logbook.tokenId,
      type: logbook.type,
      data: logbook.data,
    })
    .from(logbook)
    .where(
      and(eq(logbook.teamId, grant.teamId), eq(logbook.ensembleId, grant.ensembleId), or(decided, frozen)),
    )
    .orderBy(asc(logbook.id))
    .limit(MOST_ENTRIES);
  return rows.flatMap(({ at, userId, tokenId, type, data }) => {
    const read = logbookEntrySchema.safeParse({ type, data });
    if (!read.success) return [];
    const by = tokenId !== null ? "token" : userId !== null ? "person" : "product";
    const told = describeShared(read.data);
    if (told === null) return [];
    const { text, detail } = told;
    const words = { text: escapeLines(text), detail: detail === null ? null : escapeLines(detail) };
    return [{ at: at.toISOString(), by, ...words }];
  });
}

/**
 * The page behind a link. An ended one says when it ended and whom to ask.
 *
 * @param options.count false where nobody opens it to read: a second look of the same page
 * @throws DomainError not-found for a secret of nothing
 */
export async function loadShared(options: {
  secret: string;
  address: string;
  count: boolean;
}): Promise<SharedPage> {
  const grant = await openLink(options.secret, options.address);
  if (!grant.live) return { live: false, endedAt: grant.endedAt.toISOString(), contact: grant.contact };
  const edition = await findEdition(grant.teamId, grant.editionId);
  const [view, entries] = await Promise.all([
    lastVerification(edition.id).then((verified) =>
      toEditionView(edition, { sources: grant.sources, verified }),
    ),
    grant.logbook ? sharedEntries(grant, edition) : null,
  ]);
  if (options.count) await noteOpening(grant);
  return { live: true, edition: view, endsAt: grant.endsAt.toISOString(), entries };
}

interface Asked {
  secret: string;
  address: string;
  /** False where only the head is asked for: nothing goes out. */
  takes: boolean;
}

/** Throws once a link has ended: what it lets out is asked about again while it goes out. */
async function stillLive(secret: string): Promise<void> {
  if ((await accessBySecret(linkSha(secret)))?.live !== true) throw notFound();
}

/** A file of the edition behind a link: results always. */
export async function openSharedFile(options: Asked & { name: string }): Promise<EditionDownload> {
  const grant = await openLiveLink(options.secret, options.address);
  const edition = await findEdition(grant.teamId, grant.editionId);
  const called = `${edition.content.ensemble.name} edition ${edition.number}`;
  const file = await openEditionFile(grant, options.name, called);
  if (options.takes) {
    await noteExport(grant, { number: edition.number, file: options.name, source: false });
  }
  return { ...file, chunks: whileAllowed(file.chunks, () => stillLive(options.secret)) };
}

/** Coordinates of the most populated conformers behind a link. */
export async function loadSharedPositions(options: Omit<Asked, "takes">): Promise<Float64Array> {
  const grant = await openLiveLink(options.secret, options.address);
  return findPositions(grant.editionId);
}

/** An original file, where whoever made the link allowed it; only those that the edition was frozen from. */
export async function openSharedSource(options: Asked & { position: number }): Promise<EditionDownload> {
  const grant = await openLiveLink(options.secret, options.address);
  if (!grant.sources) throw notFound();
  const edition = await findEdition(grant.teamId, grant.editionId);
  const wanted = edition.content.inputs.files[options.position];
  if (wanted === undefined) throw notFound();
  const rows = await db
    .select({ sourceId: sources.id, bytes: sources.bytes })
    .from(editions)
    .innerJoin(ensembleFiles, eq(ensembleFiles.ensembleId, editions.ensembleId))
    .innerJoin(sources, eq(sources.id, ensembleFiles.sourceId))
    .where(
      and(
        eq(editions.id, grant.editionId),
        eq(editions.teamId, grant.teamId),
        eq(sources.sha256, Buffer.from(wanted.sha256, "hex")),
      ),
    )
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  if (options.takes) await noteExport(grant, { number: edition.number, file: wanted.name, source: true });
  return {
    name: wanted.name,
    type: "application/octet-stream",
    bytes: row.bytes,
    chunks: whileAllowed(readSource(row.sourceId), () => stillLive(options.secret)),
  };
}
