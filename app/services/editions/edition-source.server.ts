import { createHash } from "node:crypto";
import { and, asc, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, type ensembles, frames } from "../../db/schema.server.ts";
import type { MeasuredRecord } from "../../lib/averages/averaging.ts";
import type { PropertyValues } from "../../lib/averages/property-set.ts";
import { ruleOf } from "../../lib/averages/rule.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import type { EditionSource } from "../../lib/edition/build.ts";
import type { EditionContent, EditionRecipe, OpenItem } from "../../lib/edition/content.ts";
import type { FrameEnergy } from "../../lib/edition/tables.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { bondOrders } from "../../lib/sdf/orders.ts";
import type { Graph } from "../../lib/structure.ts";
import { findAveraging } from "../averages/averaging.server.ts";
import { mergeAtoms } from "../averages/property-set.server.ts";
import { findFiles } from "../ensembles/load-ensemble.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { hashFrames } from "./hash-frames.server.ts";

type EnsembleRow = typeof ensembles.$inferSelect;
type ColumnRow = typeof columns.$inferSelect;

interface FrameFact {
  label: string | null;
  index: number;
}

/** Label and place of every frame of the ensemble's own molecule, whatever its state. */
export async function ownFrames(ensembleId: string): Promise<Map<number, FrameFact>> {
  const rows = await db
    .select({ number: frames.number, label: frames.label, index: frames.indexInShape })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.shape, 0)));
  return new Map(rows.map(({ number, label, index }) => [number, { label, index: index ?? -1 }]));
}

/** Frames that a sift ran on, by number. */
export function framesOf(
  result: Pick<SiftResult, "kept" | "dropped" | "outsideWindow" | "withoutEnergy">,
): number[] {
  const numbers = [
    ...result.kept.map(({ frame }) => frame),
    ...result.dropped.map(({ frame }) => frame),
    ...result.outsideWindow,
    ...result.withoutEnergy,
  ];
  return numbers.sort((a, b) => a - b);
}

/** Columns by id, in the order asked; one that is gone is missing. */
export async function columnRows(ensembleId: string, ids: readonly string[]): Promise<ColumnRow[]> {
  if (ids.length === 0) return [];
  const rows = await db
    .select()
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), inArray(columns.id, [...ids])));
  const byId = new Map(rows.map((row) => [row.id, row]));
  return ids.flatMap((id) => byId.get(id) ?? []);
}

/** Ids of all columns of an ensemble: energies first, each kind in order of arrival. */
export async function columnIds(ensembleId: string): Promise<string[]> {
  const rows = await db
    .select({ id: columns.id })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId))
    .orderBy(asc(columns.kind), asc(columns.ordinal), asc(columns.id));
  return rows.map(({ id }) => id);
}

const shaOf = (data: Uint8Array) => createHash("sha256").update(data).digest("hex");

/** A stored column as an edition keeps it: its numbers over the conformers, and the checksum of all of them. */
export function contentColumn(
  column: ColumnRow,
  frameCount: number,
  kept: readonly { frame: number }[],
): EditionContent["columns"][number] {
  const { name, kind, unit, rule, quantity, atom } = column;
  const { values, present } = unpackColumn(column.data, frameCount);
  return {
    ...{ name, kind, unit, rule, quantity, atom },
    values: kept.map(({ frame }) => (present[frame - 1] === 1 ? (values[frame - 1] ?? null) : null)),
    sha256: shaOf(column.data),
  };
}

/** A stored level as an edition describes it. */
export function contentLevel(level: ColumnRow): NonNullable<EditionContent["level"]> {
  return {
    name: level.name,
    unit: level.unit ?? "",
    energyKind: level.energyKind ?? "electronic",
    temperature: level.temperature,
    kindStated: level.kindStated,
    ordinal: level.ordinal,
  };
}

/** Energies of the frames that took part, as stored; none of them has one without a level. */
export function frameEnergies(
  level: ColumnRow | null,
  frameCount: number,
  numbers: readonly number[],
): FrameEnergy[] {
  if (level === null) return numbers.map((frame) => ({ frame, energy: null }));
  const { values, present } = unpackColumn(level.data, frameCount);
  return numbers.map((frame) => ({
    frame,
    energy: present[frame - 1] === 1 ? (values[frame - 1] ?? null) : null,
  }));
}

/** Bond orders of the file or a SMILES, else perceived. */
function ordersOf(ensemble: EnsembleRow, graph: Graph): EditionContent["ensemble"]["orders"] {
  if (ensemble.bondTable !== null) {
    const { orders, charges, radicals } = ensemble.bondTable;
    return { orders, charges, radicals, origin: "file" };
  }
  const { orders, charges, radicals, origin } = bondOrders(graph, null);
  return {
    orders: Array.from(orders),
    charges: charges && Array.from(charges),
    radicals: radicals && Array.from(radicals),
    origin,
  };
}

const identityNumber = (identity: unknown, name: "charge" | "multiplicity"): number | null => {
  const value = typeof identity === "object" && identity !== null ? Reflect.get(identity, name) : null;
  return typeof value === "number" && Number.isInteger(value) ? value : null;
};

/** Charge and multiplicity as the file says them; else formal charges, and the lowest multiplicity that fits. */
function spinOf(ensemble: EnsembleRow, graph: Graph, orders: EditionContent["ensemble"]["orders"]) {
  const stated = identityNumber(ensemble.identity, "charge");
  const formal = (orders.charges ?? []).reduce((sum, charge) => sum + charge, 0);
  const charge = { value: stated ?? formal, origin: stated === null ? "perceived" : "file" } as const;
  const electrons = graph.elements.reduce((sum, z) => sum + z, 0) - charge.value;
  const spin = identityNumber(ensemble.identity, "multiplicity");
  const multiplicity = {
    value: spin ?? (Math.abs(electrons) % 2 === 1 ? 2 : 1),
    origin: spin === null ? "assumed" : "file",
  } as const;
  return { charge, multiplicity };
}

/** The ensemble as the edition describes it, with the counts of this moment. */
export function describeForEdition(ensemble: EnsembleRow): EditionContent["ensemble"] {
  const graph = unpackMolecule(ensemble);
  const orders = ordersOf(ensemble, graph);
  return {
    name: ensemble.name,
    formula: ensemble.formula,
    atoms: ensemble.atoms,
    elements: [...graph.elements],
    isotopes: graph.isotopes.some((mass) => mass !== 0) ? [...graph.isotopes] : null,
    atomLabels: (ensemble.atomLabels as (string | null)[] | null) ?? null,
    bonds: [...graph.bonds],
    orders,
    ...spinOf(ensemble, graph, orders),
    chirality: ensemble.chirality,
    frames: ensemble.frames,
    accepted: ensemble.accepted,
    remarked: ensemble.remarked,
    held: ensemble.held,
    openQuestions: ensemble.openQuestions,
  };
}

/** Coordinates and labels of conformers, and the checksum of all frames that took part. */
export interface CollectedFrames {
  framesSha256: string;
  /** Packed [conformer][atom][x, y, z] in the order of the distinct set. */
  positions: Float64Array;
  labels: (string | null)[];
}

/** Reads frames anew. Null where one of them is not there any more. */
export async function collectFrames(
  ensemble: EnsembleRow,
  result: Omit<SiftResult, "seconds">,
): Promise<CollectedFrames | null> {
  const facts = await ownFrames(ensemble.id);
  const numbers = framesOf(result);
  const indexOf = (frame: number) => facts.get(frame)?.index ?? -1;
  if (numbers.some((frame) => indexOf(frame) < 0)) return null;
  const kept = result.kept.map(({ frame }) => frame);
  return {
    framesSha256: await hashFrames(ensemble.id, unpackMolecule(ensemble), numbers, numbers.map(indexOf)),
    positions: await loadPositions(ensemble.id, ensemble.atoms, kept.map(indexOf)),
    labels: kept.map((frame) => facts.get(frame)?.label ?? null),
  };
}

/**
 * The source of an edition from its parts. Names and decisions (`described`, `level`, the columns' names and rules) come
 * from whoever calls: at a recomputation they are as they were frozen.
 */
export async function editionSource(options: {
  ensemble: EnsembleRow;
  described: EditionContent["ensemble"];
  team: string;
  recipe: EditionRecipe;
  result: Omit<SiftResult, "seconds">;
  files: EditionContent["inputs"]["files"];
  level: EditionContent["level"];
  columns: EditionContent["columns"];
  frames: CollectedFrames;
  version: string;
  contentVersion: 1 | 2;
  moment: readonly OpenItem[];
  outside: EditionSource["outside"];
  searches: EditionSource["searches"];
  said: Pick<EditionSource, "splits" | "measured" | "measuredProperties">;
}): Promise<EditionSource> {
  const { ensemble, described, recipe, result, level, columns: all, frames: collected } = options;
  const own = level && all.find(({ kind, name }) => kind === "energy" && name === level.name);
  const properties = all
    .filter(({ kind }) => kind === "property")
    .map(
      ({ name, unit, rule, quantity, atom, values }): PropertyValues => ({
        ...{ id: "", name, unit, values, origin: null, definition: null },
        rule: ruleOf({ rule, unit }),
        quantity: quantity ?? null,
        atoms: atom == null ? null : [atom - 1],
      }),
    );
  return {
    team: options.team,
    ensemble: described,
    inputs: { files: options.files, framesSha256: collected.framesSha256 },
    level,
    recipe: recipe.recipe,
    result,
    labels: collected.labels,
    energies: own ? own.values : result.kept.map(() => null),
    positions: collected.positions,
    temperature: recipe.temperature,
    weights: recipe.weights,
    columns: options.contentVersion === 1 ? all.map(asFirst) : all,
    properties: await mergeAtoms(
      ensemble,
      result.kept,
      properties,
      options.said.splits.map((parts) => parts.map((part) => part.map((atom) => atom - 1))),
    ),
    version: options.version,
    contentVersion: options.contentVersion,
    sigma: recipe.sigma,
    sigmaFrom: recipe.sigmaFrom,
    seed: recipe.seed,
    temperatures: recipe.temperatures,
    moment: options.moment,
    outside: options.outside,
    searches: options.searches,
    ...options.said,
  };
}

/** Groups taken apart and measured values of an ensemble as an edition freezes them: without who said it. */
export async function saidForEdition(
  ensembleId: string,
): Promise<Pick<EditionSource, "splits" | "measured" | "measuredProperties">> {
  const { data } = await findAveraging(ensembleId);
  return {
    splits: data.splits.map(({ parts }) => parts),
    measured: data.measured
      .map(({ by: _by, at: _at, ...record }): MeasuredRecord => record)
      .sort((a, b) => (a.quantity < b.quantity ? -1 : 1)),
    measuredProperties: data.properties && { values: data.properties.values },
  };
}

/** A column as content 1 has it. */
function asFirst({ quantity: _quantity, atom: _atom, ...column }: EditionContent["columns"][number]) {
  return column;
}

/** The files of an ensemble as an edition lists them. */
export async function editionSources(ensembleId: string): Promise<EditionContent["inputs"]["files"]> {
  const files = await findFiles(ensembleId);
  return files.map(({ name, format, sha256, bytes, firstFrame, frames: count }) => ({
    name,
    format,
    sha256,
    bytes,
    firstFrame,
    frames: count,
  }));
}
