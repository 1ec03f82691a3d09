import { numberCell, textCell } from "../export/csv.ts";
import { formatTemperature } from "../format.ts";
import type { Average } from "./average.ts";
import type { PropertyValues } from "./property-set.ts";
import type { AverageError } from "./uncertainty.ts";

/** The table of averages as a page shows it. */
export interface ShownAverages {
  /** K, one column of averages each. */
  temperatures: readonly number[];
  /** Place of the temperature that spread, uncertainty and covered population belong to. */
  here: number;
  /** Name of the level that weighs, and by what. */
  level: string;
  weights: string;
  /** kcal/mol; null without an error of the level. */
  sigma: number | null;
  /** Of the uncertainty: draws made and the seed they came from; null where none was drawn. */
  draws: number | null;
  seed: number;
  rows: readonly {
    property: Pick<PropertyValues, "name" | "unit">;
    rule: string;
    averages: readonly Average[];
    average: Average;
    error: AverageError | null;
  }[];
}

/**
 * All temperatures of the page in one table; every header says which temperature its numbers belong to, every row which
 * level and weights. Full precision, RFC 4180, no cell that a spreadsheet could run.
 *
 * @example shownAveragesCsv(shown).split("\r\n")[0]
 * // "property,unit,rule,average at 250 K,average at 298.15 K,spread at 298.15 K,..."
 */
export function shownAveragesCsv(shown: ShownAverages): string {
  const { temperatures, here, rows, sigma } = shown;
  const at = ` at ${formatTemperature(temperatures[here] ?? 0)} K`;
  const head = [
    ...["property", "unit", "rule"],
    ...temperatures.map((kelvin) => `average at ${formatTemperature(kelvin)} K`),
    ...[`spread${at}`, `uncertainty${at}`, `covered${at}`],
    ...["level", "weights", "sigma [kcal/mol]", "draws", "seed"],
  ];
  const lines = rows.map(({ property, rule, averages, average, error }) =>
    [
      textCell(property.name),
      textCell(property.unit ?? ""),
      rule,
      ...averages.map(({ value }) => numberCell(value)),
      numberCell(average.spread),
      numberCell(average.value === null ? null : (error?.sd ?? null)),
      numberCell(average.covered),
      textCell(shown.level),
      textCell(shown.weights),
      numberCell(sigma),
      numberCell(shown.draws),
      numberCell(shown.draws === null ? null : shown.seed),
    ].join(","),
  );
  return `${[head.join(","), ...lines].join("\r\n")}\r\n`;
}
