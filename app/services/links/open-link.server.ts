import { and, eq, gte, sql } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { editions, links, logbook } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { accessBySecret, type EndedLink, type LinkGrant } from "../auth/access.server.ts";
import { addressRange, takeAttempt } from "../auth/throttle.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { isLinkSecret, linkSha } from "./link-secret.ts";

/** Addresses that open nothing, a range of addresses and ten minutes. A person who mistypes needs a handful. */
const GUESSES = { limit: 30, seconds: 600 } as const;
/** The logbook tells of a link's openings at most as often. */
const TELL_AFTER_MS = 10 * 60_000;

/** Counts an address that opens nothing; after too many of them the caller waits. */
async function countGuess(address: string): Promise<void> {
  const wait = await takeAttempt({ kind: "link", subject: addressRange(address), ...GUESSES });
  if (wait === null) return;
  throw new DomainError(
    "too-many",
    "Too many tries",
    "Too many addresses that open nothing came from here. Try again later.",
    { extra: { retryAfter: wait } },
  );
}

/**
 * What the secret in an address opens. To whoever holds no secret, everything looks like an address that never was.
 *
 * @param address of the caller, for the count of guesses
 * @throws DomainError not-found for a secret of nothing, too-many after many of them
 */
export async function openLink(secret: string, address: string): Promise<LinkGrant | EndedLink> {
  const found = isLinkSecret(secret) ? await accessBySecret(linkSha(secret)) : null;
  if (found !== null) return found;
  await countGuess(address);
  throw notFound();
}

/**
 * The grant behind a secret, for files and data: an ended link is not found there like any other address.
 *
 * @throws DomainError not-found, too-many
 */
export async function openLiveLink(secret: string, address: string): Promise<LinkGrant> {
  const found = await openLink(secret, address);
  if (!found.live) throw notFound();
  return found;
}

/** Counts an opening, and tells the logbook of it now and then: no address, nothing of the person. */
export async function noteOpening(grant: LinkGrant): Promise<void> {
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ opened: links.opened, openedAt: links.openedAt, number: editions.number })
      .from(links)
      .innerJoin(editions, eq(editions.id, links.editionId))
      .where(eq(links.id, grant.linkId))
      .for("update");
    const row = rows[0];
    if (row === undefined) return;
    const now = new Date();
    await tx
      .update(links)
      .set({ opened: sql`${links.opened} + 1`, openedAt: now })
      .where(eq(links.id, grant.linkId));
    if (row.openedAt !== null && now.getTime() - row.openedAt.getTime() < TELL_AFTER_MS) return;
    await writeEntry(
      tx,
      grant,
      { userId: null, tokenId: null },
      {
        type: "link-opened",
        data: { number: row.number, prefix: grant.prefix, label: grant.label, opened: row.opened + 1 },
      },
    );
  });
}

/**
 * Tells the logbook that a link gave a file out: the first time each day (UTC), since a download that is repeated or cut is
 * the same export. No address, nothing of the person.
 *
 * @param taken.file its name; `source` for an original file
 */
export async function noteExport(
  grant: LinkGrant,
  taken: { number: number; file: string; source: boolean },
): Promise<void> {
  const today = new Date(`${new Date().toISOString().slice(0, 10)}T00:00:00.000Z`);
  await inTransaction(async (tx) => {
    // Two downloads at the same moment wait for each other, so that one of them finds the entry of the other.
    await tx.select({ id: links.id }).from(links).where(eq(links.id, grant.linkId)).for("update");
    const known = await tx
      .select({ data: logbook.data })
      .from(logbook)
      .where(
        and(
          eq(logbook.ensembleId, grant.ensembleId),
          eq(logbook.teamId, grant.teamId),
          eq(logbook.type, "link-exported"),
          gte(logbook.createdAt, today),
        ),
      );
    const entry = {
      type: "link-exported" as const,
      data: { linkId: grant.linkId, prefix: grant.prefix, label: grant.label, ...taken },
    };
    if (known.some(({ data }) => isSameExport(data, entry.data))) return;
    await writeEntry(tx, grant, { userId: null, tokenId: null }, entry);
  });
}

function isSameExport(data: unknown, taken: { linkId: string; file: string; source: boolean }): boolean {
  if (typeof data !== "object" || data === null) return false;
  return (["linkId", "file", "source"] as const).every((key) => Reflect.get(data, key) === taken[key]);
}
