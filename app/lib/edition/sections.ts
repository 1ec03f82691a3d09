import { averageOf, type Moments } from "../averages/average.ts";
import { averagesRows, type PropertyValues } from "../averages/property-set.ts";
import { compareLevels } from "../levels/compare.ts";
import type { KeptConformer } from "../recipe/result.ts";
import { sampleSd } from "../stats/moments.ts";
import { samplingCoverage } from "../trust/sampling-coverage.ts";
import { ENERGY_UNITS, kcalPer } from "../units.ts";
import type { EditionContent, EditionPopulations } from "./content.ts";

/**
 * Averages of the property columns with the populations of the edition; null without populations or properties.
 *
 * @param errors what the draws say, one a property; null writes the rows without them, as content 1 has them
 */
export function averagesSection(
  properties: readonly PropertyValues[],
  moments: readonly Moments[],
  populations: EditionPopulations | null,
  errors: readonly { sd: number; low: number | null; high: number | null }[] | null | undefined,
): EditionContent["averages"] {
  if (populations === null || properties.length === 0) return null;
  const shares = Float64Array.from(populations.values, ({ population }) => population);
  const averages = moments.map((one) => averageOf(one, shares));
  return averagesRows(properties, averages, null).map(({ uncertainty: _none, ...row }, k) =>
    errors === undefined ? row : { ...row, error: row.average === null ? null : (errors?.[k] ?? null) },
  );
}

type Column = EditionContent["columns"][number];

/** Energies in kcal/mol above the first conformer's that has one; subtracted first, converted once. */
export function relativeEnergies(column: Column): (number | null)[] | null {
  const unit = ENERGY_UNITS.find((one) => one === column.unit);
  const zero = column.values.find((value) => value !== null);
  if (unit === undefined || zero === undefined || zero === null) return null;
  return column.values.map((value) => (value === null ? null : (value - zero) * kcalPer(unit)));
}

/**
 * The error of a level taken from another one: the standard deviation (n - 1) of its deviations over the conformers that
 * have both energies, as Trust takes it. Null with fewer than three.
 *
 * @example deviationFrom(columns, "MMFF94", "DFT") // 0.62, kcal/mol
 */
export function deviationFrom(
  columns: readonly Column[],
  levelName: string | null,
  otherName: string,
): number | null {
  const energies = (name: string | null) => {
    const column = columns.find((one) => one.kind === "energy" && one.name === name);
    return column ? relativeEnergies(column) : null;
  };
  const [own, other] = [energies(levelName), energies(otherName)];
  if (own === null || other === null) return null;
  const deviations = own.flatMap((value, row) => {
    const against = other[row] ?? null;
    return value === null || against === null ? [] : [value - against];
  });
  return deviations.length < 3 ? null : sampleSd(deviations);
}

/** The level of the sift against every other level of the ensemble, at the temperature of the populations. */
export function comparisonSections(
  columns: readonly Column[],
  levelName: string | null,
  populations: EditionPopulations | null,
): EditionContent["comparisons"] {
  const own = columns.find(({ kind, name }) => kind === "energy" && name === levelName);
  const level = own ? relativeEnergies(own) : null;
  if (!own || level === null || populations === null) return [];
  return columns
    .filter((column) => column.kind === "energy" && column !== own)
    .flatMap((column) => {
      const reference = relativeEnergies(column);
      const both = level.flatMap((value, row) => (value !== null && reference?.[row] != null ? [row] : []));
      if (reference === null || both.length < 2) return [];
      const found = compareLevels({
        level: both.map((row) => level[row] ?? 0),
        reference: both.map((row) => reference[row] ?? 0),
        weights: both.map((row) => populations.values[row]?.weight ?? 1),
        temperatureK: populations.temperature,
      });
      const { n, mad, rmsd, max, spearman, populationOverlap, window } = found;
      const windows = window.map(({ share, kcal, count }) => ({ share, kcal, count }));
      return [{ reference: column.name, n, mad, rmsd, max, spearman, populationOverlap, window: windows }];
    });
}

/** How complete the search is; null without conformers. */
export function samplingSection(kept: readonly KeptConformer[]): EditionContent["sampling"] {
  const found = samplingCoverage(kept.map((conformer) => conformer.found));
  if (found === null) return null;
  const { hits, once, twice, coverage, richness } = found;
  return { hits, once, twice, coverage, atLeast: richness.estimate };
}
