import { formatDistance, formatEnergy, formatPercent, plural, withUnit } from "../format.ts";
import { byPopulation, type ConformerRow } from "../workbench/conformers.ts";
import { populationsFinding, shareWords } from "../workbench/findings.ts";
import type { EditionContent } from "./content.ts";

/** Shapes whose extents differ by less are equally stretched, Å. */
const SAME_EXTENT = 0.05;

/**
 * The result of an edition in two or three sentences, for somebody who decides with it: how many shapes, which carry the
 * ensemble, and whether the stretched-out one is real.
 *
 * @returns sentences, the first of which stands alone
 */
export function editionSummary(
  content: Pick<EditionContent, "kept" | "level" | "populations" | "uncertainty">,
  rows: readonly ConformerRow[],
): string[] {
  const first = rows[0];
  if (first === undefined) return ["No structure of this ensemble is accepted, so there is no distinct set."];
  if (content.populations === null) {
    return [
      `The accepted frames show ${plural(rows.length, "distinct shape")}.`,
      "They carry no energies, so no population can be given.",
    ];
  }
  const finding = populationsFinding(rows, content.populations.temperature);
  const of = rows.length > 1 ? ` out of ${plural(rows.length, "distinct shape")}` : "";
  const text = finding.text.replace(/\.$/, "");
  return [
    `${text}${of}, by ${content.level?.name ?? "the"} energies.`,
    finding.second,
    ranges(content.uncertainty, rows),
    stretched(content.kept, rows),
  ].filter((sentence) => sentence !== null);
}

/** How far the error of the level moves the most populated shape, and how often it is the lowest. */
function ranges(uncertainty: EditionContent["uncertainty"], rows: readonly ConformerRow[]): string | null {
  const [first] = byPopulation(rows);
  const drawn = first === undefined ? undefined : uncertainty?.populations[first.index];
  if (uncertainty === null || first === undefined || drawn === undefined || rows.length < 2) return null;
  return (
    `With an error of ± ${withUnit(formatEnergy(uncertainty.sigma), "kcal/mol")} in each energy ${first.name} holds between ` +
    `${formatPercent(drawn.low)} and ${formatPercent(drawn.high)} (95 % of the draws) and is the lowest in ${shareWords(drawn.lowest)} of them.`
  );
}

/** How much the most stretched shape holds; nothing where all are about as long. */
function stretched(kept: EditionContent["kept"], rows: readonly ConformerRow[]): string | null {
  const extents = kept.map(({ extent }) => extent);
  const longest = extents.reduce((most, extent) => Math.max(most, extent), 0);
  const shortest = extents.reduce((least, extent) => Math.min(least, extent), longest);
  if (longest - shortest < SAME_EXTENT) return null;
  // Of shapes as long as each other the most populated speaks.
  const row = byPopulation(rows).find(({ index }) => longest - (extents[index] ?? 0) < SAME_EXTENT);
  if (!row) return null;
  return (
    `The most stretched-out shape, ${row.name} (${withUnit(formatDistance(extents[row.index]), "Å")} from end to end), ` +
    `holds ${shareWords(row.population ?? 0)}.`
  );
}

/**
 * How long a shape is among the others of its set, in words.
 *
 * @example extentWords(10.2, [10.2, 7.1, 5.0]) // "stretched out"
 */
export function extentWords(extent: number, all: readonly number[]): string {
  const longest = Math.max(...all);
  const shortest = Math.min(...all);
  if (longest - shortest < SAME_EXTENT) return "as long as the others";
  const place = (extent - shortest) / (longest - shortest);
  return place >= 0.8 ? "stretched out" : place >= 0.4 ? "half stretched" : "folded";
}
