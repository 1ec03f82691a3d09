import { createHash } from "node:crypto";
import { and, eq } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { editions, ensembleFiles, ensembles, verifications } from "../../db/schema.server.ts";
import {
  type EditionContent,
  type EditionInputs,
  type EditionRecipe,
  editionInputsSchema,
  editionRecipeSchema,
} from "../../lib/edition/content.ts";
import { contentText } from "../../lib/edition/content-text.ts";
import { editionFiles } from "../../lib/edition/edition-files.ts";
import { MOMENT_CODES } from "../../lib/edition/open.ts";
import { searchesOf } from "../../lib/edition/searches.ts";
import { type FrameEnergy, readFrameEnergies } from "../../lib/edition/tables.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { readSource } from "../ensembles/source-writer.server.ts";
import { notFound } from "../http.server.ts";
import { finishJob } from "../jobs/finish-job.server.ts";
import { type JobRun, JobStopped } from "../jobs/job-run.ts";
import { computeSift } from "../jobs/pool.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { drawContent } from "./draw-uncertainty.server.ts";
import { type PackedFile, packFile, readWholeFile } from "./edition-files.server.ts";
import {
  type CollectedFrames,
  collectFrames,
  columnRows,
  contentColumn,
  editionSource,
  frameEnergies,
  framesOf,
  ownFrames,
} from "./edition-source.server.ts";
import { type FoundEdition, findEdition, type VerifiedFile } from "./find-edition.server.ts";
import { readKeptPositions } from "./kept-positions.ts";
import { citationFiles, type ManifestInput, manifestFile } from "./manifest.ts";
import { EDITION_CODE_VERSION } from "./product-version.ts";

type EnsembleRow = typeof ensembles.$inferSelect;
type Result = Omit<SiftResult, "seconds">;

interface Frozen {
  teamId: string;
  edition: FoundEdition;
  ensemble: EnsembleRow;
  recipe: EditionRecipe;
  inputs: EditionInputs;
}

async function load(editionId: string): Promise<Frozen> {
  const rows = await db
    .select({
      teamId: editions.teamId,
      ensemble: ensembles,
      recipe: editions.recipe,
      inputs: editions.inputs,
    })
    .from(editions)
    .innerJoin(ensembles, and(eq(ensembles.id, editions.ensembleId), eq(ensembles.teamId, editions.teamId)))
    .where(eq(editions.id, editionId))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  return {
    teamId: row.teamId,
    edition: await findEdition(row.teamId, editionId),
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

/** Original files that are not what they were. */
async function changedSources({ ensemble, inputs }: Frozen): Promise<VerifiedFile[]> {
  const sources = await rehashSources(ensemble.id, inputs);
  return inputs.files
    .map(({ name, sha256 }) => ({ name: `input ${name}`, was: sha256, is: sources.get(name) ?? null }))
    .filter(({ was, is }) => was !== is)
    .map((one) => ({
      ...one,
      note: `The original file ${one.is === null ? "is not there any more" : "holds other bytes now"}; frames and columns were read from it then.`,
    }));
}

/** What an edition is computed from again, and what of it had to be taken from the edition itself. */
interface Inputs {
  columns: EditionContent["columns"];
  /** Of every frame that took part; null where nothing holds them any more. */
  energies: FrameEnergy[] | null;
  notes: VerifiedFile[];
}

const sameValues = (a: readonly (number | null)[], b: readonly (number | null)[]) =>
  a.length === b.length && a.every((value, k) => value === b[k]);

/**
 * The columns of an edition: as stored where their numbers are those that it used, else as the edition kept them. A table
 * that only grew since holds the same numbers.
 */
async function readColumns(frozen: Frozen): Promise<Inputs> {
  const { edition, ensemble, recipe, inputs } = frozen;
  const { content } = edition;
  const numbers = framesOf(content);
  const kept = await keptEnergies(edition);
  let energies: FrameEnergy[] | null =
    recipe.recipe.level === null ? numbers.map((frame) => ({ frame, energy: null })) : kept;
  const notes: VerifiedFile[] = [];
  const columns: EditionContent["columns"] = [];
  for (const [k, { id, name, sha256: was }] of inputs.columns.entries()) {
    const frozenColumn = content.columns[k];
    if (frozenColumn === undefined) throw new Error(`Column ${name} is none of the edition.`);
    const [row] = await columnRows(ensemble.id, [id]);
    const now = row && contentColumn(row, ensemble.frames, content.kept);
    const isLevel = id === recipe.recipe.level;
    const own = isLevel && row ? frameEnergies(row, ensemble.frames, numbers) : null;
    const used =
      now !== undefined &&
      (now.sha256 === was ||
        (sameValues(now.values, frozenColumn.values) && (!isLevel || sameEnergies(own, kept))));
    // Names, units and rules are as they were frozen; of the first editions the atom stands in the table alone.
    const { quantity = now?.quantity ?? null, atom = now?.atom ?? null } = frozenColumn;
    columns.push({ ...frozenColumn, quantity, atom, ...(used ? { values: now.values } : {}) });
    if (used && isLevel) energies = own;
    if (!used) notes.push(goneColumn(name, was, now?.sha256 ?? null));
  }
  return { columns, energies, notes };
}

function goneColumn(name: string, was: string, is: string | null): VerifiedFile {
  return {
    name: `column ${name}`,
    was,
    is,
    note: `${is === null ? "The column is not there any more" : "The column holds other numbers now"}; those that the edition keeps were taken.`,
  };
}

/** Energies that the edition kept itself; null in the first ones. */
async function keptEnergies({ id, files }: FoundEdition): Promise<FrameEnergy[] | null> {
  if (!files.some(({ name }) => name === "frames.csv")) return null;
  return readFrameEnergies((await readWholeFile(id, "frames.csv")).toString("utf8"));
}

function sameEnergies(own: FrameEnergy[] | null, kept: FrameEnergy[] | null): boolean {
  // Where the edition keeps none the sift that follows shows whether they are the same.
  if (own === null || kept === null) return own !== null;
  return sameValues(
    own.map(({ energy }) => energy),
    kept.map(({ energy }) => energy),
  );
}

/** Frames as they are stored, or, where they are not those that took part, the conformers as the edition keeps them. */
async function readFrames({
  edition,
  ensemble,
}: Frozen): Promise<{ frames: CollectedFrames; same: boolean }> {
  const { content } = edition;
  const was = content.inputs.framesSha256;
  const now = await collectFrames(ensemble, content);
  if (now !== null && now.framesSha256 === was) return { frames: now, same: true };
  const xyz = (await readWholeFile(edition.id, "distinct-set.xyz")).toString("utf8");
  return {
    same: false,
    frames: {
      framesSha256: was,
      positions: readKeptPositions(xyz, content.kept.length, content.ensemble.atoms),
      labels: content.kept.map(({ label }) => label),
    },
  };
}

/** Runs the recipe again in a thread, on the frames that took part then, whatever was held or released since. */
async function siftAgain(
  { edition, ensemble, recipe }: Frozen,
  energies: readonly FrameEnergy[],
  run: JobRun,
): Promise<Result> {
  const { content } = edition;
  const numbers = Int32Array.from(framesOf(content));
  const places = await ownFrames(ensemble.id);
  const indices = Array.from(numbers, (number) => places.get(number)?.index ?? -1);
  const graph = unpackMolecule(ensemble);
  const answer = await computeSift(
    {
      elements: graph.elements,
      isotopes: graph.isotopes,
      bonds: graph.bonds,
      atoms: ensemble.atoms,
      positions: await loadPositions(ensemble.id, ensemble.atoms, indices),
      numbers,
      energies: content.level && taskEnergies(content.level.unit, energies, numbers),
      recipe: recipe.recipe,
      cancel: run.cancel,
    },
    { progress: (fraction, pairs) => run.progress(0.1 + 0.7 * fraction, pairs), signal: run.signal },
  );
  if (answer.kind === "cancelled") throw new JobStopped(`The recomputation of ${edition.id} was stopped.`);
  const { seconds: _seconds, ...result } = answer.result;
  return { ...result, held: content.held };
}

function taskEnergies(unit: string, energies: readonly FrameEnergy[], numbers: Int32Array) {
  const known = ENERGY_UNITS.find((one) => one === unit);
  if (known === undefined) throw new Error(`A level has the unit ${unit}, which is no unit of energy.`);
  const byFrame = new Map(energies.map(({ frame, energy }) => [frame, energy]));
  const values = Array.from(numbers, (number) => byFrame.get(number) ?? null);
  return {
    values: Float64Array.from(values, (value) => value ?? 0),
    present: Uint8Array.from(values, (value) => (value === null ? 0 : 1)),
    kcalPerUnit: kcalPer(known),
  };
}

/** Content as it comes out now; where only sentences are worded otherwise by now, with those that were frozen. */
function settleWords(content: EditionContent, frozen: EditionContent): EditionContent {
  const { words, findings, open } = frozen;
  const worded = { ...content, words, findings, open };
  return contentText(worded) === contentText(frozen) ? worded : content;
}

/** Writes every file of the edition again and compares it with what was handed out, byte for byte by its checksum. */
async function compareFiles(
  edition: FoundEdition,
  content: EditionContent,
  positions: Float64Array,
  energies: readonly FrameEnergy[],
): Promise<VerifiedFile[]> {
  const fresh = [];
  for (const file of editionFiles(content, positions, energies)) fresh.push(await packFile(file, false));
  const { made, notes } = settleFigures(edition, fresh);
  const told = toldOf(edition, content, made.find(({ name }) => name === "results.json")?.sha256 ?? "");
  for (const file of citationFiles(told)) made.push(await packFile(file, false));
  made.push(await packFile(manifestFile(told, made), false));
  const shas = new Map(made.map(({ name, sha256 }) => [name, sha256]));
  return [
    ...edition.files
      .filter(({ name }) => notes.every((note) => note.name !== name))
      .map(({ name, sha256 }) => ({ name, was: sha256, is: shas.get(name) ?? null })),
    ...notes,
  ];
}

/**
 * Figures that this version draws otherwise: where the content that they are drawn from agrees to the byte, that is said of
 * them and counts as no difference, in them or in the manifest that lists them.
 */
function settleFigures(edition: FoundEdition, fresh: PackedFile[]) {
  const frozen = new Map(edition.files.map((file) => [file.name, file]));
  const results = fresh.find(({ name }) => name === "results.json");
  const agrees = results !== undefined && results.sha256 === frozen.get("results.json")?.sha256;
  const notes: VerifiedFile[] = [];
  const made = fresh.map((file) => {
    const was = frozen.get(file.name);
    if (!agrees || !file.name.endsWith(".svg") || was === undefined || was.sha256 === file.sha256)
      return file;
    const note = "This version draws the figure otherwise; what it is drawn from agrees, byte for byte.";
    notes.push({ name: file.name, was: was.sha256, is: file.sha256, note });
    return { ...file, bytes: was.bytes, sha256: was.sha256 };
  });
  return { made, notes };
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

function notSifted(why: string, was: string): VerifiedFile {
  return {
    name: "sift",
    was,
    is: null,
    note: `${why}: the sift was not run again. Everything after it was, from the distinct set that the edition keeps.`,
  };
}

async function recompute(frozen: Frozen, run: JobRun): Promise<VerifiedFile[]> {
  const { edition, ensemble, recipe } = frozen;
  const sources = await changedSources(frozen);
  const { columns, energies, notes } = await readColumns(frozen);
  const { frames, same } = await readFrames(frozen);
  run.progress(0.1);
  const again = same && energies !== null;
  if (!again) {
    const why = same
      ? "The energies of the frames are not kept anywhere"
      : "The frames are not those of then";
    notes.push(notSifted(why, edition.content.inputs.framesSha256));
  }
  const result: Result = again ? await siftAgain(frozen, energies, run) : edition.content;
  run.progress(0.8);
  const source = await editionSource({
    ...{ ensemble, recipe, result, columns, frames },
    described: edition.content.ensemble,
    team: edition.content.team,
    files: edition.content.inputs.files,
    level: edition.content.level,
    version: edition.version,
    contentVersion: edition.content.version,
    // What lies beside an ensemble is no result: it stands as it was said then.
    outside: edition.content.outside ?? [],
    searches: searchesOf(edition.content),
    // What people said is no result either: it stands as it was frozen, and what follows from it is computed anew.
    said: {
      splits: edition.content.splits ?? [],
      measured: (edition.content.measured ?? []).map(({ quantity, stated }) => ({ quantity, ...stated })),
      measuredProperties: edition.content.measuredProperties?.stated ?? null,
    },
    moment: edition.content.open.filter(({ code }) => MOMENT_CODES.some((one) => one === code)),
  });
  const content = settleWords(await drawContent(source), edition.content);
  run.progress(0.9);
  const files = await compareFiles(edition, content, frames.positions, energies ?? []);
  return [...files, ...sources, ...notes];
}

/**
 * Recomputes an edition from the stored bytes and compares every file: the original files are hashed again, the recipe runs
 * again in a thread, all files are written again. What came out is kept. An input that is gone or another is named, and
 * what the edition itself keeps stands in for it.
 */
export async function runVerification(
  { editionId, userId }: { editionId: string; userId: string | null },
  run: JobRun,
): Promise<void> {
  const started = performance.now();
  const frozen = await load(editionId);
  const files = await recompute(frozen, run);
  const compared = files.filter(({ note }) => note === undefined);
  const agree = compared.filter(({ was, is }) => was === is).length;
  const same = agree === compared.length;
  const seconds = (performance.now() - started) / 1000;
  const { teamId, ensemble, edition } = frozen;
  await inTransaction(async (tx) => {
    await tx.insert(verifications).values({
      id: newId(),
      editionId,
      same,
      files,
      codeVersion: EDITION_CODE_VERSION,
      seconds,
      createdBy: userId,
      createdAt: new Date(),
    });
    await writeEntry(
      tx,
      { teamId, ensembleId: ensemble.id },
      { userId, tokenId: null },
      {
        type: "edition-verified",
        data: { number: edition.number, same, files: compared.length, agree },
      },
    );
    await finishJob(tx, run.jobId, run.holder);
  });
}
