import { and, desc, eq, isNull } from "drizzle-orm";
import { z } from "zod";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { columns, editions, ensembles } from "../../db/schema.server.ts";
import {
  DEFAULT_ERROR_KCAL,
  DEFAULT_TEMPERATURES,
  MAX_ERROR_KCAL,
  MAX_TEMPERATURES,
} from "../../lib/averages/averages-state.ts";
import { DEFAULT_SEED } from "../../lib/averages/uncertainty.ts";
import { compareEditions, firstWords } from "../../lib/edition/compare.ts";
import {
  type EditionContent,
  type EditionInputs,
  type EditionRecipe,
  editionContentSchema,
} from "../../lib/edition/content.ts";
import { contentText } from "../../lib/edition/content-text.ts";
import { editionFiles } from "../../lib/edition/edition-files.ts";
import { deviationFrom } from "../../lib/edition/sections.ts";
import { shownRows } from "../../lib/edition/shown.ts";
import { DomainError } from "../../lib/errors.ts";
import { TEMPERATURE_RANGE_K } from "../../lib/url-state.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { findSearches } from "../averages/load-trust.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { notFound } from "../http.server.ts";
import { type Doer, writeEntry } from "../logbook/write-entry.server.ts";
import { outsideMethodsOf } from "../outside/outside-methods.server.ts";
import { type FoundSift, findSift } from "../sifts/find-sift.server.ts";
import { needResult } from "../sifts/populations.server.ts";
import { drawContent } from "./draw-uncertainty.server.ts";
import { type PackedFile, packFile, storeFiles } from "./edition-files.server.ts";
import {
  collectFrames,
  columnIds,
  columnRows,
  contentColumn,
  contentLevel,
  describeForEdition,
  editionSource,
  editionSources,
  frameEnergies,
  framesOf,
  saidForEdition,
} from "./edition-source.server.ts";
import { citationFiles, type ManifestInput, manifestFile } from "./manifest.ts";
import { momentItems } from "./moment-items.server.ts";
import { EDITION_CODE_VERSION, productVersion } from "./product-version.ts";

/** Conformers whose coordinates go along for pictures and the 3D view; the files hold all. */
const MOST_SHOWN = 300;
const SHOWN_BYTES = 4 * 2 ** 20;

const ID = /^[a-z2-7]{16}$/;

export const freezeSchema = z.strictObject({
  sift: z.string().max(40),
  temperature: z.number().min(TEMPERATURE_RANGE_K[0]).max(TEMPERATURE_RANGE_K[1]),
  weights: z.enum(["auto", "copies", "degeneracy"]),
  title: z.string().trim().max(200, "A title has up to 200 characters."),
  remark: z.string().trim().max(4000, "A remark has up to 4,000 characters."),
  /** Error of the level, kcal/mol, one standard deviation; 0 draws nothing. */
  sigma: z.number().min(0).max(MAX_ERROR_KCAL).default(DEFAULT_ERROR_KCAL),
  /** Id of the level that the error was taken against. */
  sigmaFrom: z.string().regex(ID).nullable().default(null),
  /** K, shown beside the one that the populations are taken at. */
  temperatures: z
    .array(z.number().min(TEMPERATURE_RANGE_K[0]).max(TEMPERATURE_RANGE_K[1]))
    .max(MAX_TEMPERATURES)
    .default(DEFAULT_TEMPERATURES),
});
export type FreezeRequest = z.input<typeof freezeSchema>;

export interface FrozenEdition {
  id: string;
  number: number;
  contentSha256: string;
}

interface At extends Doer {
  teamId: string;
  ensembleId: string;
}

type EnsembleRow = typeof ensembles.$inferSelect;

/** Coordinates of the most populated conformers, in the order of the set, that fit beside the row. */
function shownPositions(content: EditionContent, positions: Float64Array): Buffer {
  const length = 3 * content.ensemble.atoms;
  const most = Math.min(MOST_SHOWN, Math.max(4, Math.floor(SHOWN_BYTES / (8 * length))));
  const shown = new Float64Array(length * Math.min(most, content.kept.length));
  for (const [place, row] of shownRows(content, most).entries()) {
    shown.set(positions.subarray(row * length, (row + 1) * length), place * length);
  }
  return Buffer.from(shown.buffer);
}

/** Holds the ensemble until the edition stands, and makes sure that it is still what was collected. */
async function lockUnchanged(tx: Transaction, ensemble: EnsembleRow, inputs: EditionInputs): Promise<void> {
  const rows = await tx
    .select({ acceptedSha: ensembles.acceptedSha })
    .from(ensembles)
    .where(
      and(eq(ensembles.id, ensemble.id), eq(ensembles.teamId, ensemble.teamId), isNull(ensembles.deletedAt)),
    )
    .for("update");
  const row = rows[0];
  if (row === undefined) throw notFound();
  const now = await tx
    .select({ id: columns.id, sha: columns.dataSha })
    .from(columns)
    .where(eq(columns.ensembleId, ensemble.id));
  const shas = new Map(now.map(({ id, sha }) => [id, sha?.toString("hex")]));
  const same =
    row.acceptedSha?.equals(ensemble.acceptedSha ?? Buffer.alloc(0)) === true &&
    inputs.columns.every(({ id, sha256 }) => shas.get(id) === sha256);
  if (!same) {
    throw new DomainError(
      "conflict",
      "The ensemble changed",
      "Frames or columns changed while the edition was being frozen. Look at them, then freeze again.",
    );
  }
}

/** The number of the next edition, and what changed since the last. */
async function nextEdition(tx: Transaction, ensembleId: string, content: EditionContent) {
  const rows = await tx
    .select({ number: editions.number, content: editions.content })
    .from(editions)
    .where(eq(editions.ensembleId, ensembleId))
    .orderBy(desc(editions.number))
    .limit(1);
  const last = rows[0];
  if (last === undefined) return { number: 1, changed: [firstWords(content)] };
  const before = editionContentSchema.parse(JSON.parse(last.content));
  return { number: last.number + 1, changed: compareEditions(before, content).words };
}

interface Prepared {
  ensemble: EnsembleRow;
  team: string;
  recipe: EditionRecipe;
  inputs: EditionInputs;
  content: EditionContent;
  text: string;
  positions: Float64Array;
  files: PackedFile[];
}

async function recipeOf(
  ensembleId: string,
  sift: FoundSift,
  asked: z.output<typeof freezeSchema>,
): Promise<EditionRecipe> {
  const ids = await columnIds(ensembleId);
  return {
    sift: sift.id,
    recipe: sift.recipe,
    temperature: asked.temperature,
    weights: asked.weights,
    columns: ids,
    sigma: sift.recipe.level === null || asked.sigma === 0 ? null : asked.sigma,
    sigmaFrom: null,
    seed: DEFAULT_SEED,
    temperatures: [...asked.temperatures].sort((a, b) => a - b),
    changed: [],
  };
}

async function prepare(at: At, request: FreezeRequest): Promise<Prepared> {
  const asked = freezeSchema.parse(request);
  const { ensemble, team } = await findEnsembleRow(at.teamId, at.ensembleId);
  const sift = await findSift(asked.sift);
  if (sift.ensembleId !== ensemble.id) throw notFound();
  const { seconds: _seconds, ...result } = await needResult(sift);
  if (!sift.current) throw outOfDate();
  const plain = await recipeOf(ensemble.id, sift, asked);
  const shown = await columnRows(ensemble.id, plain.columns);
  const frames = await collectFrames(ensemble, result);
  if (frames === null) throw outOfDate();
  const files = await editionSources(ensemble.id);
  const level = shown.find(({ id }) => id === sift.recipe.level) ?? null;
  const kept = shown.map((column) => contentColumn(column, ensemble.frames, result.kept));
  const recipe = { ...plain, ...errorFrom(shown, kept, sift, asked.sigmaFrom) };
  const source = await editionSource({
    ...{ ensemble, recipe, result, files, frames },
    described: describeForEdition(ensemble),
    team: team.name,
    level: level && contentLevel(level),
    columns: kept,
    version: productVersion(EDITION_CODE_VERSION),
    contentVersion: 2,
    moment: await momentItems(sift),
    outside: await outsideMethodsOf(ensemble, sift, result),
    searches: await findSearches(ensemble.id),
    said: await saidForEdition(ensemble.id),
  });
  const content = await drawContent(source);
  const energies = frameEnergies(level, ensemble.frames, framesOf(result));
  const packed: PackedFile[] = [];
  for (const file of editionFiles(content, frames.positions, energies)) packed.push(await packFile(file));
  return {
    ...{ ensemble, team: team.name, recipe, content, positions: frames.positions },
    inputs: {
      files: files.map(({ name, sha256 }, position) => ({ position, name, sha256 })),
      frames: frames.framesSha256,
      columns: shown.map(({ id, name }, k) => ({ id, name, sha256: kept[k]?.sha256 ?? "" })),
    },
    text: contentText(content),
    files: packed,
  };
}

/** The error of the level taken against another one, where that was asked for and can be done. */
function errorFrom(
  rows: readonly { id: string; name: string }[],
  kept: EditionContent["columns"],
  sift: FoundSift,
  sigmaFrom: string | null,
): Partial<Pick<EditionRecipe, "sigma" | "sigmaFrom">> {
  const against = rows.find(({ id }) => id === sigmaFrom);
  const sigma = against ? deviationFrom(kept, sift.recipe.levelName, against.name) : null;
  return against === undefined || sigma === null ? {} : { sigma, sigmaFrom: against.name };
}

function outOfDate(): DomainError {
  return new DomainError(
    "conflict",
    "The distinct set is out of date",
    "Frames or energies changed after this sift. Sift again, look at the result, then freeze it.",
  );
}

/**
 * Freezes an edition; access has been decided before. Of several at once each gets its own number.
 *
 * @throws DomainError conflict while the sift is not done, is out of date, or the ensemble changes meanwhile
 */
export async function freezeFor(at: At, request: FreezeRequest): Promise<FrozenEdition> {
  const { ensemble, team, recipe, inputs, content, text, positions, files } = await prepare(at, request);
  const contentSha256 = files.find(({ name }) => name === "results.json")?.sha256 ?? "";
  return inTransaction(async (tx) => {
    await lockUnchanged(tx, ensemble, inputs);
    const { number, changed } = await nextEdition(tx, ensemble.id, content);
    const createdAt = new Date();
    const told: ManifestInput = {
      team,
      ensemble: ensemble.name,
      number,
      title: request.title,
      remark: request.remark,
      frozenAt: createdAt.toISOString(),
      contentSha256,
      version: productVersion(EDITION_CODE_VERSION),
      content,
    };
    const all = [...files];
    for (const file of citationFiles(told)) all.push(await packFile(file));
    all.push(await packFile(manifestFile(told, all)));
    const id = newId();
    await tx.insert(editions).values({
      id,
      teamId: at.teamId,
      ensembleId: ensemble.id,
      number,
      title: request.title,
      remark: request.remark,
      recipe: { ...recipe, changed },
      inputs,
      codeVersion: EDITION_CODE_VERSION,
      content: text,
      contentSha: Buffer.from(contentSha256, "hex"),
      positions: shownPositions(content, positions),
      files: all.map(({ name, bytes, sha256 }) => ({ name, bytes, sha256 })),
      createdBy: at.userId,
      createdAt,
    });
    await storeFiles(tx, id, all);
    await writeEntry(tx, at, at, {
      type: "edition-frozen",
      data: { number, title: request.title, conformers: content.kept.length, sha256: contentSha256 },
    });
    return { id, number, contentSha256 };
  });
}

/** Freezes an edition as a person. */
export async function freezeEdition(options: {
  actor: Actor;
  ensembleId: string;
  request: FreezeRequest;
}): Promise<FrozenEdition> {
  const grant = await accessEnsemble(options.actor, "share", options.ensembleId);
  return freezeFor(grant, options.request);
}
