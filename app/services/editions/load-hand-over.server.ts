import { and, desc, eq } from "drizzle-orm";
import { z } from "zod";
import { db } from "../../db/client.server.ts";
import { editions, teams, users } from "../../db/schema.server.ts";
import { changesSince, compareEditions, firstWords } from "../../lib/edition/compare.ts";
import { pairFault } from "../../lib/edition/compared-pair.ts";
import { editionFileSchema, editionRecipeSchema } from "../../lib/edition/content.ts";
import type { EditionRow, HandOverView, LinkRow } from "../../lib/edition/views.ts";
import { type Actor, accessEnsemble, roleMay } from "../auth/access.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { findLinks } from "../links/list-links.server.ts";
import { findSift } from "../sifts/find-sift.server.ts";
import { findVerifying } from "./ask-to-verify.server.ts";
import { draftEdition } from "./draft-edition.server.ts";
import { verifiedView } from "./edition-view.server.ts";
import { findEdition, lastVerification } from "./find-edition.server.ts";
import { productVersion } from "./product-version.ts";

/** Editions in the table; older ones are reached by their number. */
const MOST_EDITIONS = 100;

type At = { teamId: string; ensembleId: string };
type Row = EditionRow & { id: string };

async function findRows(at: At, links: readonly LinkRow[]): Promise<Row[]> {
  const rows = await db
    .select({
      id: editions.id,
      number: editions.number,
      title: editions.title,
      remark: editions.remark,
      createdAt: editions.createdAt,
      by: users.name,
      recipe: editions.recipe,
      contentSha: editions.contentSha,
      codeVersion: editions.codeVersion,
      files: editions.files,
    })
    .from(editions)
    .leftJoin(users, eq(users.id, editions.createdBy))
    .where(and(eq(editions.teamId, at.teamId), eq(editions.ensembleId, at.ensembleId)))
    .orderBy(desc(editions.number))
    .limit(MOST_EDITIONS);
  const verifying = await findVerifying(at.teamId);
  return Promise.all(
    rows.map(async ({ createdAt, recipe, contentSha, codeVersion, files, ...row }) => ({
      ...row,
      frozenAt: createdAt.toISOString(),
      changed: editionRecipeSchema.parse(recipe).changed,
      liveLinks: links.filter(({ edition, state }) => edition === row.number && state === "live").length,
      contentSha256: contentSha?.toString("hex") ?? "",
      version: productVersion(codeVersion),
      files: z.array(editionFileSchema).parse(files),
      verified: verifiedView(await lastVerification(row.id)),
      verifying: verifying.get(row.id) ?? null,
    })),
  );
}

interface Shown {
  siftId: string | null;
  temperature: number;
  weights: "auto" | "copies" | "degeneracy";
  /** Error of the level as the address has it; left out, the usual one. */
  error?: { sigmaKcal: number | null; sigmaFrom: string | null };
}

const NO_ERROR = { sigmaKcal: null, sigmaFrom: null };

/** What an edition would say now; null without a finished sift of this ensemble. */
async function draftOf(at: At, { siftId, temperature, weights, error = NO_ERROR }: Shown) {
  if (siftId === null) return null;
  const sift = await findSift(siftId);
  if (sift.ensembleId !== at.ensembleId) return null;
  const { ensemble, team } = await findEnsembleRow(at.teamId, at.ensembleId);
  const draft = await draftEdition({ ensemble, team: team.name, sift, temperature, weights, error });
  return draft && { ...draft, current: sift.current };
}

async function nextOf(
  at: At,
  last: Row | undefined,
  draft: Awaited<ReturnType<typeof draftOf>>,
): Promise<HandOverView["next"]> {
  // Only what stands on the frames as they are can be frozen.
  if (draft === null || !draft.current) return null;
  const { content, sigma } = draft;
  const { open } = content;
  if (last === undefined) return { number: 1, changed: [firstWords(content)], open, sigma };
  const before = await findEdition(at.teamId, last.id);
  return { number: last.number + 1, changed: changesSince(before.content, content), open, sigma };
}

/** Two editions by their numbers, the earlier first; null where `pairFault` has something to say. */
async function comparisonOf(at: At, rows: readonly Row[], asked: readonly [number, number] | null) {
  if (asked === null) return null;
  const [before, after] = [Math.min(...asked), Math.max(...asked)];
  const first = rows.find(({ number }) => number === before);
  const second = rows.find(({ number }) => number === after);
  if (!first || !second || before === after) return null;
  const [a, b] = await Promise.all([findEdition(at.teamId, first.id), findEdition(at.teamId, second.id)]);
  return { before, after, result: compareEditions(a.content, b.content) };
}

async function linkDaysOf(teamId: string): Promise<number> {
  const rows = await db.select({ days: teams.linkDays }).from(teams).where(eq(teams.id, teamId));
  return rows[0]?.days ?? 0;
}

/**
 * Editions, links, and what the next edition would bring. Guests of the example see none of it.
 *
 * @param options.compare numbers of two editions, 0 for what is no number of one; null where none are asked for
 */
export async function loadHandOver(
  options: Shown & { actor: Actor; ensembleId: string; compare: readonly [number, number] | null },
): Promise<HandOverView> {
  const grant = await accessEnsemble(options.actor, "read", options.ensembleId);
  const now = new Date();
  const draft = await draftOf(grant, options);
  const methods = draft === null ? null : draft.content.words.methods.split("\n");
  const nothing = {
    editions: [],
    links: [],
    next: null,
    comparison: null,
    comparisonFault: null,
    linkDays: 0,
    mayShare: false,
  };
  if (grant.role === "guest") return { ...nothing, methods, now: now.toISOString() };
  const mayShare = roleMay(grant.role, "share");
  const links = await findLinks(grant.teamId, grant.ensembleId, now);
  const rows = await findRows(grant, links);
  const [next, comparison, linkDays] = await Promise.all([
    nextOf(grant, rows[0], draft),
    comparisonOf(grant, rows, options.compare),
    linkDaysOf(grant.teamId),
  ]);
  return {
    editions: rows.map(({ id: _id, ...row }) => row),
    links,
    next,
    methods,
    comparison,
    comparisonFault:
      options.compare &&
      pairFault(
        options.compare,
        rows.map(({ number }) => number),
      ),
    linkDays,
    mayShare,
    now: now.toISOString(),
  };
}
