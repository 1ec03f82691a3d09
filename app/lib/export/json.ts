import { CONSTANTS_YEAR, kcalPer } from "../units.ts";
import { type ExportSet, sourceOf } from "./export-set.ts";

/** 2: `energy` in kcal/mol, the source's own number beside it as `sourceEnergy`. */
export const EXPORT_SCHEMA_VERSION = 2;

/** Goes with every list of populations. */
export const CAUTION =
  "The populations are those of the listed conformers at the named level and temperature: they carry the error of " +
  "that level, and conformers that the search did not find are missing from them.";

/**
 * The distinct set as JSON, in pieces: recipe, units, checksums of the sources and constants first, then one
 * conformer a line. Lengths Å, energies kcal/mol; `sourceEnergy` is the number as the source has it, in its unit.
 *
 * @example JSON.parse([...writeJson(set)].join("")).conformers.length
 */
export function* writeJson(set: ExportSet): Generator<string> {
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
    },
    ensemble: set.ensemble,
    elements: Array.from(set.elements),
    isotopes: set.isotopes && Array.from(set.isotopes),
    sources: set.sources,
    level: set.level,
    recipe: set.recipe,
    temperature: set.temperature,
    weights: set.weights,
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
    const atoms = conformer.mapping ? { sourceAtoms: conformer.mapping.map((atom) => atom + 1) } : {};
    yield `${k === 0 ? "" : ","}\n    ${JSON.stringify({ ...line, ...bound, source, ...atoms })}`;
  }
  yield "\n  ]\n}\n";
}
