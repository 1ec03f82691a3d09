import type { FigureFact } from "~/components/charts/export-figure";
import type { Comparison, Members } from "./use-comparison";

/** What is taken off the differences of two levels, by the zero that was chosen. */
export const ZERO_WORDS = {
  "least-squares": "mean offset",
  median: "median offset",
  "own-minimum": "difference of the lowest",
  common: "difference at the common conformer",
} as const;

/** What every number of a comparison belongs to; it travels into the files of its figures and tables. */
export function comparisonFacts(
  { level, reference, comparison }: Pick<Comparison, "level" | "reference" | "comparison">,
  { weights, among }: Pick<Members, "weights" | "among">,
  temperatureK: number,
): FigureFact[] {
  return [
    { name: "temperature", unit: "K", value: temperatureK },
    { name: "level", value: level.name },
    { name: "reference", value: reference.name },
    { name: "weights", value: weights },
    { name: "of", value: among === "conformers" ? "the distinct set" : "all accepted frames" },
    { name: "zero", value: ZERO_WORDS[comparison.align] },
    ...(comparison.sd === null
      ? []
      : [{ name: "standard deviation about the zero", unit: "kcal/mol", value: comparison.sd }]),
  ];
}
