import { and, asc, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, type ensembles, frames } from "../../db/schema.server.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { type CsvColumn, writeCsv } from "../../lib/export/csv.ts";
import type { ExportConformer, ExportSet } from "../../lib/export/export-set.ts";
import { writeJson } from "../../lib/export/json.ts";
import { writeSdf } from "../../lib/export/sdf-writer.ts";
import { writeXyz } from "../../lib/export/xyz-writer.ts";
import type { KeptConformer, SiftResult } from "../../lib/recipe/result.ts";
import { distinctPopulations } from "../../lib/thermo/populations.ts";
import { ENERGY_UNITS, STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import { type Actor, accessSift, type Grant } from "../auth/access.server.ts";
import { findBatchRanges, withFoundIn } from "../ensembles/batches.server.ts";
import { findEnsembleRow, findFiles } from "../ensembles/load-ensemble.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { ordersOf, unpackMolecule } from "../ensembles/molecule.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { type FoundSift, findSift } from "./find-sift.server.ts";
import { needResult } from "./populations.server.ts";
import { siftWarnings } from "./standing.server.ts";

export type ExportFormat = "xyz" | "sdf" | "csv" | "json";

const TYPES: Record<ExportFormat, string> = {
  xyz: "chemical/x-xyz; charset=utf-8",
  sdf: "chemical/x-mdl-sdfile; charset=utf-8",
  csv: "text/csv; charset=utf-8",
  json: "application/json; charset=utf-8",
};

export interface ExportFile {
  name: string;
  type: string;
  pieces: Iterable<string>;
  /** Why the set is not that of the frames as they are; null where it is. */
  notCurrent: string | null;
}

type ColumnRow = typeof columns.$inferSelect;

/** What of its frame goes along with a conformer. */
async function frameFacts(ensembleId: string, numbers: number[]) {
  const facts = new Map<number, { label: string | null; index: number; mapping: number[] | null }>();
  for (let at = 0; at < numbers.length; at += 5_000) {
    const rows = await db
      .select({
        number: frames.number,
        label: frames.label,
        index: frames.indexInShape,
        mapping: frames.mapping,
      })
      .from(frames)
      .where(and(eq(frames.ensembleId, ensembleId), inArray(frames.number, numbers.slice(at, at + 5_000))));
    for (const { number, index, ...row } of rows) facts.set(number, { ...row, index: index ?? -1 });
  }
  return facts;
}

function valuesOf(column: ColumnRow, frameCount: number, kept: readonly KeptConformer[]): (number | null)[] {
  const { values, present } = unpackColumn(column.data, frameCount);
  return kept.map(({ frame }) => (present[frame - 1] === 1 ? (values[frame - 1] ?? null) : null));
}

function levelOf(level: ColumnRow | undefined): ExportSet["level"] {
  const unit = ENERGY_UNITS.find((one) => one === level?.unit);
  if (level === undefined || unit === undefined) return null;
  return { name: level.name, unit, energyKind: level.energyKind ?? "electronic" };
}

function populationsOf(
  sift: FoundSift,
  level: ColumnRow | undefined,
  kept: KeptConformer[],
  temperature: number,
) {
  if (sift.recipe.level === null) return null;
  return distinctPopulations(kept, level?.energyKind ?? "electronic", temperature);
}

/** Why the set is not that of the frames as they are, for the file itself. */
async function notCurrentWords(sift: FoundSift, result: SiftResult): Promise<string> {
  const warnings = await siftWarnings(sift, result);
  return warnings.find(({ code }) => code === "not-current")?.message ?? "";
}

async function collect(grant: Grant & { ensembleId: string }, sift: FoundSift, temperature: number) {
  const result = withFoundIn(await needResult(sift), await findBatchRanges(grant.ensembleId));
  const { kept } = result;
  const { ensemble } = await findEnsembleRow(grant.teamId, grant.ensembleId);
  const all = await db
    .select()
    .from(columns)
    .where(eq(columns.ensembleId, grant.ensembleId))
    .orderBy(asc(columns.kind), asc(columns.ordinal));
  const level = all.find((column) => column.id === sift.recipe.level);
  const energies = level ? valuesOf(level, ensemble.frames, kept) : [];
  const facts = await frameFacts(
    grant.ensembleId,
    kept.map(({ frame }) => frame),
  );
  const weighed = populationsOf(sift, level, kept, temperature);
  const conformers = kept.map(
    (conformer, row): ExportConformer => ({
      ...conformer,
      label: facts.get(conformer.frame)?.label ?? null,
      energy: energies[row] ?? null,
      population: weighed?.populations[row] ?? null,
      mapping: facts.get(conformer.frame)?.mapping ?? null,
    }),
  );
  const graph = unpackMolecule(ensemble);
  const set: ExportSet = {
    ensemble: { id: ensemble.id, name: ensemble.name, formula: ensemble.formula },
    elements: graph.elements,
    isotopes: graph.isotopes.some((mass) => mass !== 0) ? graph.isotopes : null,
    atomLabels: (ensemble.atomLabels as (string | null)[] | null) ?? null,
    sources: await findFiles(ensemble.id),
    level: levelOf(level),
    recipe: sift.recipe,
    temperature,
    weights: weighed?.weights.kind ?? null,
    conformers,
    ...(sift.current ? {} : { notCurrent: await notCurrentWords(sift, result) }),
  };
  const indices = kept.map(({ frame }) => facts.get(frame)?.index ?? -1);
  return { set, ensemble, columns: all, indices };
}

/** Coordinates by frame number. */
async function positionsBy(
  set: ExportSet,
  ensemble: typeof ensembles.$inferSelect,
  indices: number[],
): Promise<(frame: number) => Float64Array> {
  const positions = await loadPositions(ensemble.id, ensemble.atoms, indices);
  const length = 3 * ensemble.atoms;
  const rowOf = new Map(set.conformers.map(({ frame }, row) => [frame, row]));
  return (frame) => {
    const from = (rowOf.get(frame) ?? 0) * length;
    return positions.subarray(from, from + length);
  };
}

function csvColumns(all: ColumnRow[], frameCount: number, set: ExportSet): CsvColumn[] {
  return all.map((column) => ({
    name: column.name,
    unit: column.unit,
    values: valuesOf(column, frameCount, [...set.conformers]),
  }));
}

async function piecesOf(
  { set, ensemble, columns: all, indices }: Awaited<ReturnType<typeof collect>>,
  format: ExportFormat,
): Promise<Iterable<string>> {
  const quantities = csvColumns(all, ensemble.frames, set);
  if (format === "csv") return writeCsv(set, quantities);
  const positions = await positionsBy(set, ensemble, indices);
  if (format === "xyz") return writeXyz(set, positions);
  const graph = unpackMolecule(ensemble);
  if (format === "json") return writeJson(set, graph.bonds, positions, quantities);
  // The level of the sift goes along as the energy of each record.
  const further = quantities.filter((_, k) => all[k]?.name !== set.level?.name);
  return writeSdf(set, { bonds: graph.bonds, orders: ordersOf(ensemble, graph) }, positions, further);
}

/**
 * The distinct set as a file of one format; access has been decided before, and nothing is written down.
 *
 * @throws DomainError conflict while the sift is not done
 */
export async function openExport(
  grant: Grant & { ensembleId: string },
  sift: FoundSift,
  format: ExportFormat,
  temperature = STANDARD_TEMPERATURE_K,
): Promise<ExportFile> {
  const found = await collect(grant, sift, temperature);
  const { ensemble } = found;
  const pieces = await piecesOf(found, format);
  const name = `${ensemble.name} distinct set.${format}`;
  return { name, type: TYPES[format], pieces, notCurrent: found.set.notCurrent ?? null };
}

/**
 * The distinct set of a sift as a file; members' exports stand in the logbook.
 *
 * @param options.temperature K, for the populations that go along
 * @throws DomainError conflict while the sift is not done, and where its energies or structures were read again or replaced
 */
export async function exportSift(options: {
  actor: Actor;
  siftId: string;
  format: ExportFormat;
  temperature?: number;
}): Promise<ExportFile> {
  const grant = await accessSift(options.actor, "read", options.siftId);
  const sift = await findSift(grant.siftId);
  const file = await openExport(grant, sift, options.format, options.temperature);
  if (grant.role !== "guest") {
    await writeEntry(db, grant, grant, {
      type: "export",
      data: { siftId: grant.siftId, format: options.format },
    });
  }
  return file;
}
