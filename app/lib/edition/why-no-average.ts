import { LEAST_COVERED } from "../averages/average.ts";
import { formatPercent } from "../format.ts";
import { shareWords } from "../workbench/findings.ts";
import type { EditionContent } from "./content.ts";

type AverageRow = NonNullable<EditionContent["averages"]>[number];

/**
 * Why an average of an edition is not given; null where it is.
 *
 * @example whyNoAverage({ average: null, covered: 0.434, rule: "linear" }) // "covers 43 % of the population: no average below 90 %"
 */
export function whyNoAverage({
  average,
  covered,
  rule,
}: Pick<AverageRow, "average" | "covered" | "rule">): string | null {
  if (average !== null) return null;
  // Rounding must not refuse exactly 90 %.
  if (covered < LEAST_COVERED - 1e-12) {
    return `covers ${shareWords(covered)} of the population: no average below ${formatPercent(LEAST_COVERED)}`;
  }
  if (rule === "circular") return "the angles cancel out: no mean direction";
  return rule === "r-6" || rule === "r-3" ? "a distance is 0: no average" : "no value by its rule";
}
