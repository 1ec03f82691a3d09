import { averageOf } from "../averages/average.ts";
import { averagesRows, type PropertyValues, propertyMoments } from "../averages/property-set.ts";
import { compareLevels } from "../levels/compare.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { KeptConformer } from "../recipe/result.ts";
import { samplingCoverage } from "../trust/sampling-coverage.ts";
import { ENERGY_UNITS, kcalPer } from "../units.ts";
import type { EditionContent, EditionPopulations } from "./content.ts";

/** Averages of the property columns with the populations of the edition; null without populations or properties. */
export function averagesSection(
  properties: readonly PropertyValues[],
  kept: readonly KeptConformer[],
  recipe: SiftRecipe,
  populations: EditionPopulations | null,
): EditionContent["averages"] {
  if (populations === null || properties.length === 0 || kept.length === 0) return null;
  const shares = Float64Array.from(populations.values, ({ population }) => population);
  const merged = recipe.mirror === "merge" && recipe.chirality === "achiral";
  const averages = properties.map((property) => averageOf(propertyMoments(property, kept, merged), shares));
  return averagesRows(properties, averages, null).map(({ uncertainty: _none, ...row }) => row);
}

type Column = EditionContent["columns"][number];

/** Energies in kcal/mol above the first conformer's that has one; subtracted first, converted once. */
function relative(column: Column): (number | null)[] | null {
  const unit = ENERGY_UNITS.find((one) => one === column.unit);
  const zero = column.values.find((value) => value !== null);
  if (unit === undefined || zero === undefined || zero === null) return null;
  return column.values.map((value) => (value === null ? null : (value - zero) * kcalPer(unit)));
}

/** The level of the sift against every other level of the ensemble, at the temperature of the populations. */
export function comparisonSections(
  columns: readonly Column[],
  levelName: string | null,
  populations: EditionPopulations | null,
): EditionContent["comparisons"] {
  const own = columns.find(({ kind, name }) => kind === "energy" && name === levelName);
  const level = own ? relative(own) : null;
  if (!own || level === null || populations === null) return [];
  return columns
    .filter((column) => column.kind === "energy" && column !== own)
    .flatMap((column) => {
      const reference = relative(column);
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
