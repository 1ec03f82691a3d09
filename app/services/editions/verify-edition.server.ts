import { createHash } from "node:crypto";
import { and, eq } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { editions, ensembleFiles, ensembles, verifications } from "../../db/schema.server.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { buildContent } from "../../lib/edition/build.ts";
import {
  type EditionContent,
  type EditionInputs,
  type EditionRecipe,
  editionInputsSchema,
  editionRecipeSchema,
} from "../../lib/edition/content.ts";
import { editionFiles } from "../../lib/edition/edition-files.ts";
import { DomainError } from "../../lib/errors.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import { type Actor, accessEdition } from "../auth/access.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { readSource } from "../ensembles/source-writer.server.ts";
import { notFound } from "../http.server.ts";
import { computeSift } from "../jobs/pool.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { packFile } from "./edition-files.server.ts";
import { collectEdition, columnRows, framesOf, ownFrames } from "./edition-source.server.ts";
import { type FoundEdition, findEdition, type VerifiedFile } from "./find-edition.server.ts";
import { citationFiles, type ManifestInput, manifestFile } from "./manifest.ts";
import { EDITION_CODE_VERSION } from "./product-version.ts";

/** Longest that a computation may take before whoever waits for it is told to come again. */
const PATIENCE_MS = 10 * 60_000;

export interface Verification {
  same: boolean;
  files: VerifiedFile[];
  seconds: number;
}

type EnsembleRow = typeof ensembles.$inferSelect;

interface Frozen {
  edition: FoundEdition;
  ensemble: EnsembleRow;
  recipe: EditionRecipe;
  inputs: EditionInputs;
}

async function load(teamId: string, editionId: string): Promise<Frozen> {
  const edition = await findEdition(teamId, editionId);
  const rows = await db
    .select({ ensemble: ensembles, recipe: editions.recipe, inputs: editions.inputs })
    .from(editions)
    .innerJoin(ensembles, eq(ensembles.id, editions.ensembleId))
    .where(and(eq(editions.id, editionId), eq(ensembles.teamId, teamId)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  return {
    edition,
    ensemble: row.ensemble,
    recipe: editionRecipeSchema.parse(row.recipe),
    inputs: editionInputsSchema.parse(row.inputs),
  };
}

/** SHA-256 of the original bytes as they are stored now, file by file of the edition. */
async function rehashSources(ensembleId: string, inputs: EditionInputs): Promise<Map<string, string>> {
  const rows = await db
    .select({ name: ensembleFiles.name, position: ensembleFiles.position, sourceId: ensembleFiles.sourceId })
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, ensembleId));
  const found = new Map<string, string>();
  for (const { position, name } of inputs.files) {
    const row = rows.find((one) => one.position === position && one.name === name);
    if (row === undefined) continue;
    const hash = createHash("sha256");
    for await (const chunk of readSource(row.sourceId)) hash.update(chunk);
    found.set(name, hash.digest("hex"));
  }
  return found;
}

/** Inputs that are not what they were, with both checksums. */
async function changedInputs(frozen: Frozen): Promise<VerifiedFile[]> {
  const { ensemble, inputs } = frozen;
  const sources = await rehashSources(ensemble.id, inputs);
  const columns = new Map(
    (
      await columnRows(
        ensemble.id,
        inputs.columns.map(({ id }) => id),
      )
    ).map((row) => [row.id, row]),
  );
  const checks: VerifiedFile[] = [
    ...inputs.files.map(({ name, sha256 }) => ({
      name: `input ${name}`,
      was: sha256,
      is: sources.get(name) ?? null,
    })),
    ...inputs.columns.map(({ id, name, sha256 }) => {
      const data = columns.get(id)?.data;
      const is = data ? createHash("sha256").update(data).digest("hex") : null;
      return { name: `column ${name}`, was: sha256, is };
    }),
  ];
  return checks.filter(({ was, is }) => was !== is);
}

/** Runs the recipe again in a thread, on the frames that took part then, whatever was held or released since. */
async function siftAgain({ edition, ensemble, recipe }: Frozen): Promise<Omit<SiftResult, "seconds">> {
  const { content } = edition;
  const numbers = Int32Array.from(framesOf(content));
  const places = await ownFrames(ensemble.id);
  const indices = Array.from(numbers, (number) => places.get(number)?.index ?? -1);
  const graph = unpackMolecule(ensemble);
  const level = (await columnRows(ensemble.id, recipe.recipe.level === null ? [] : [recipe.recipe.level]))[0];
  const answer = await computeSift(
    {
      elements: graph.elements,
      isotopes: graph.isotopes,
      bonds: graph.bonds,
      atoms: ensemble.atoms,
      positions: await loadPositions(ensemble.id, ensemble.atoms, indices),
      numbers,
      energies: level
        ? energiesOf({ data: level.data, unit: content.level?.unit ?? level.unit }, ensemble.frames, numbers)
        : null,
      recipe: recipe.recipe,
      cancel: new Int32Array(new SharedArrayBuffer(4)),
    },
    { progress: () => {}, signal: AbortSignal.timeout(PATIENCE_MS) },
  );
  if (answer.kind === "cancelled") throw new Error("The computation was stopped.");
  const { seconds: _seconds, ...result } = answer.result;
  return { ...result, held: content.held };
}

function energiesOf(
  level: { data: Uint8Array; unit: string | null },
  frameCount: number,
  numbers: Int32Array,
) {
  const all = unpackColumn(level.data, frameCount);
  const unit = ENERGY_UNITS.find((one) => one === level.unit);
  if (unit === undefined) throw new Error(`A level has the unit ${level.unit}, which is no unit of energy.`);
  return {
    values: Float64Array.from(numbers, (number) => all.values[number - 1] ?? 0),
    present: Uint8Array.from(numbers, (number) => all.present[number - 1] ?? 0),
    kcalPerUnit: kcalPer(unit),
  };
}

/** Writes every file of the edition again and compares it with what was handed out, byte for byte by its checksum. */
async function compareFiles(frozen: Frozen, result: Omit<SiftResult, "seconds">): Promise<VerifiedFile[]> {
  const { edition, ensemble, recipe } = frozen;
  const collected = await collectEdition({
    ensemble,
    described: edition.content.ensemble,
    team: edition.content.team,
    recipe,
    result,
    files: edition.content.inputs.files,
    version: edition.version,
    frozen: edition.content,
  });
  const content = buildContent(collected.source);
  const made = [];
  for (const file of editionFiles(content, collected.positions)) made.push(await packFile(file, false));
  const told = toldOf(edition, content, made.find(({ name }) => name === "results.json")?.sha256 ?? "");
  for (const file of citationFiles(told)) made.push(await packFile(file, false));
  made.push(await packFile(manifestFile(told, made), false));
  const shas = new Map(made.map(({ name, sha256 }) => [name, sha256]));
  return edition.files.map(({ name, sha256 }) => ({ name, was: sha256, is: shas.get(name) ?? null }));
}

function toldOf(edition: FoundEdition, content: EditionContent, contentSha256: string): ManifestInput {
  return {
    // As it was then: a team may be called something else by now.
    team: edition.content.team,
    ensemble: content.ensemble.name,
    number: edition.number,
    title: edition.title,
    remark: edition.remark,
    frozenAt: edition.createdAt.toISOString(),
    contentSha256,
    version: edition.version,
    content,
  };
}

async function recompute(frozen: Frozen): Promise<VerifiedFile[]> {
  const changed = await changedInputs(frozen);
  if (changed.length > 0) {
    return [...changed, ...frozen.edition.files.map(({ name, sha256 }) => ({ name, was: sha256, is: null }))];
  }
  return compareFiles(frozen, await siftAgain(frozen));
}

/**
 * Recomputes an edition from the stored bytes and compares every file: the original files are hashed again, the recipe runs
 * again in a thread, all files are written again. What came out is kept.
 */
export async function verifyEdition(options: {
  actor: Actor;
  ensembleId: string;
  number: number;
}): Promise<Verification> {
  const grant = await accessEdition(options.actor, "share", options.ensembleId, options.number);
  const started = performance.now();
  const frozen = await load(grant.teamId, grant.editionId);
  const files = await recompute(frozen).catch((error: unknown) => {
    if (error instanceof Error && error.name === "AbortError") {
      throw new DomainError(
        "unavailable",
        "Not verified yet",
        "The server is busy with other work. Try again in a while.",
      );
    }
    throw error;
  });
  const same = files.every(({ was, is }) => was === is);
  const seconds = (performance.now() - started) / 1000;
  await inTransaction(async (tx) => {
    await tx.insert(verifications).values({
      id: newId(),
      editionId: grant.editionId,
      same,
      files,
      codeVersion: EDITION_CODE_VERSION,
      seconds,
      createdBy: grant.userId,
      createdAt: new Date(),
    });
    const agree = files.filter(({ was, is }) => was === is).length;
    await writeEntry(tx, grant, grant, {
      type: "edition-verified",
      data: { number: grant.number, same, files: files.length, agree },
    });
  });
  return { same, files, seconds };
}
