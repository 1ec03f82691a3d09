import { CONSTANTS_YEAR, kcalPer } from "../units.ts";
import type { CsvColumn } from "./csv.ts";
import { type ExportSet, sourceOf } from "./export-set.ts";

/**
 * 2: `energy` in kcal/mol, the source's own number beside it as `sourceEnergy`. 3: bonds, columns, and of each conformer
 * its coordinates and values, so that the file reads back as structures.
 */
export const EXPORT_SCHEMA_VERSION = 3;

/** Goes with every list of populations. */
export const CAUTION =
  "The populations are those of the listed conformers at the named level and temperature: they carry the error of " +
  "that level, and conformers that the search did not find are missing from them.";

/**
 * The distinct set as JSON, in pieces: recipe, units, checksums of the sources and constants first, then one
 * conformer a line. Lengths Å, energies kcal/mol; `sourceEnergy` is the number as the source has it, in its unit, and
 * so are the values of the columns.
 *
 * @param bonds pairs of atoms, from 0, as the graph has them
 * @param positions coordinates of a frame, [atom][xyz] in Å
 * @param quantities all columns of the ensemble over the conformers of the set, in their order
 * @example JSON.parse([...writeJson(set, bonds, positions, [])].join("")).conformers.length
 */
export function* writeJson(
  set: ExportSet,
  bonds: ArrayLike<number>,
  positions: (frame: number) => ArrayLike<number>,
  quantities: readonly CsvColumn[],
): Generator<string> {
  const head = {
    schema: "lowlying-distinct-set",
    schemaVersion: EXPORT_SCHEMA_VERSION,
    caution: CAUTION,
    constants: CONSTANTS_YEAR,
    units: {
      energy: "kcal/mol",
      sourceEnergy: set.level?.unit ?? null,
      relativeEnergy: "kcal/mol",
      mirrorRmsd: "Å",
      population: "fraction",
      temperature: "K",
      positions: "Å",
    },
    ensemble: set.ensemble,
    elements: Array.from(set.elements),
    isotopes: set.isotopes && Array.from(set.isotopes),
    bonds: pairsFromOne(bonds),
    columns: quantities.map(({ name, unit }) => ({ name, unit })),
    sources: set.sources,
    level: set.level,
    recipe: set.recipe,
    temperature: set.temperature,
    weights: set.weights,
    ...(set.notCurrent === undefined
      ? {}
      : { current: false, warnings: [{ code: "not-current", message: set.notCurrent }] }),
  };
  const perUnit = set.level && kcalPer(set.level.unit);
  yield `${JSON.stringify(head, null, 2).slice(0, -2)},\n  "conformers": [`;
  for (const [k, conformer] of set.conformers.entries()) {
    const {
      frame,
      label,
      energy,
      relativeEnergy,
      population,
      degeneracy,
      symmetryNumber,
      copies,
      mirrorRmsd,
      found,
    } = conformer;
    const source = sourceOf(set.sources, frame)?.sha256 ?? null;
    const bound = conformer.upperBound === undefined ? {} : { upperBound: conformer.upperBound };
    const line = {
      frame,
      label,
      energy: energy === null || perUnit === null ? null : energy * perUnit,
      sourceEnergy: energy,
      relativeEnergy,
      population,
      degeneracy,
      symmetryNumber,
      copies,
      mirrorRmsd,
      found,
    };
    const values = quantities.map((column) => column.values[k] ?? null);
    const atoms = conformer.mapping ? { sourceAtoms: conformer.mapping.map((atom) => atom + 1) } : {};
    yield `${k === 0 ? "" : ","}\n    ${JSON.stringify({ ...line, ...bound, source, ...atoms, values, positions: triples(positions(frame)) })}`;
  }
  yield "\n  ]\n}\n";
}

/** Bonds as people count atoms, from 1. */
function pairsFromOne(bonds: ArrayLike<number>): [number, number][] {
  return Array.from({ length: bonds.length / 2 }, (_, k) => [bonds[2 * k]! + 1, bonds[2 * k + 1]! + 1]);
}

function triples(positions: ArrayLike<number>): [number, number, number][] {
  return Array.from({ length: positions.length / 3 }, (_, atom) => [
    positions[3 * atom]!,
    positions[3 * atom + 1]!,
    positions[3 * atom + 2]!,
  ]);
}
