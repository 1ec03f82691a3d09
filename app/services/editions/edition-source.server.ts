import { createHash } from "node:crypto";
import { and, asc, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, type ensembles, frames } from "../../db/schema.server.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import type { EditionSource } from "../../lib/edition/build.ts";
import type { EditionContent, EditionInputs, EditionRecipe } from "../../lib/edition/content.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { bondOrders } from "../../lib/sdf/orders.ts";
import type { Graph } from "../../lib/structure.ts";
import { propertyValues } from "../averages/property-set.server.ts";
import { findFiles } from "../ensembles/load-ensemble.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { hashFrames } from "./hash-frames.server.ts";

type EnsembleRow = typeof ensembles.$inferSelect;
type ColumnRow = typeof columns.$inferSelect;

/** What an edition is made of, with the checksums of what went in. */
export interface CollectedEdition {
  source: EditionSource;
  inputs: EditionInputs;
  /** Packed [conformer][atom][x, y, z] in the order of the distinct set. */
  positions: Float64Array;
}

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

function valuesOf(column: ColumnRow, frameCount: number, kept: SiftResult["kept"]): (number | null)[] {
  const { values, present } = unpackColumn(column.data, frameCount);
  return kept.map(({ frame }) => (present[frame - 1] === 1 ? (values[frame - 1] ?? null) : null));
}

const shaOf = (data: Uint8Array) => createHash("sha256").update(data).digest("hex");

/** Names, units and rules as they were frozen; only the numbers are read again. */
function asFrozen(columns: ColumnRow[], frozen: EditionContent | null): ColumnRow[] {
  if (frozen === null) return columns;
  return columns.map((column, k) => {
    const { name, kind, unit, rule } = frozen.columns[k] ?? column;
    const level = kind === "energy" && name === frozen.level?.name ? frozen.level : null;
    return {
      ...column,
      name,
      kind,
      unit,
      rule,
      ...(level && {
        energyKind: level.energyKind,
        temperature: level.temperature,
        kindStated: level.kindStated,
        ordinal: level.ordinal,
      }),
    };
  });
}

function contentColumn(column: ColumnRow, frameCount: number, kept: SiftResult["kept"]) {
  const { name, kind, unit, rule } = column;
  return { name, kind, unit, rule, values: valuesOf(column, frameCount, kept), sha256: shaOf(column.data) };
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

/**
 * Collects an edition from what is stored: coordinates, columns, labels and files are read anew, and their checksums are
 * taken of what was read.
 *
 * @param described the ensemble as the edition describes it: names and decisions, which no computation gives
 */
export async function collectEdition(options: {
  ensemble: EnsembleRow;
  described: EditionContent["ensemble"];
  team: string;
  recipe: EditionRecipe;
  result: Omit<SiftResult, "seconds">;
  files: EditionContent["inputs"]["files"];
  version: string;
  /** What was frozen, where it is computed again. */
  frozen: EditionContent | null;
}): Promise<CollectedEdition> {
  const { ensemble, described, team, recipe, result, files, version } = options;
  const graph = unpackMolecule(ensemble);
  const facts = await ownFrames(ensemble.id);
  const indexOf = (frame: number) => facts.get(frame)?.index ?? -1;
  const numbers = framesOf(result);
  const framesSha256 = await hashFrames(ensemble.id, graph, numbers, numbers.map(indexOf));
  const kept = result.kept.map(({ frame }) => frame);
  const positions = await loadPositions(ensemble.id, ensemble.atoms, kept.map(indexOf));
  const shown = asFrozen(await columnRows(ensemble.id, recipe.columns), options.frozen);
  const properties = await propertyValues(
    ensemble,
    result.kept,
    shown.filter(({ kind }) => kind === "property"),
  );
  const contentColumns = shown.map((column) => contentColumn(column, ensemble.frames, result.kept));
  const level = shown.find(({ id }) => id === recipe.recipe.level);
  return {
    positions,
    inputs: {
      files: files.map(({ name, sha256 }, position) => ({ position, name, sha256 })),
      frames: framesSha256,
      columns: shown.map(({ id, name }, k) => ({ id, name, sha256: contentColumns[k]?.sha256 ?? "" })),
    },
    source: {
      team,
      ensemble: described,
      inputs: { files, framesSha256 },
      level: level
        ? {
            name: level.name,
            unit: level.unit ?? "",
            energyKind: level.energyKind ?? "electronic",
            temperature: level.temperature,
            kindStated: level.kindStated,
            ordinal: level.ordinal,
          }
        : null,
      recipe: recipe.recipe,
      result,
      labels: kept.map((frame) => facts.get(frame)?.label ?? null),
      energies: level ? valuesOf(level, ensemble.frames, result.kept) : kept.map(() => null),
      positions,
      temperature: recipe.temperature,
      weights: recipe.weights,
      columns: contentColumns,
      properties,
      version,
    },
  };
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
