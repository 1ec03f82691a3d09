import { averagesCsv } from "../averages/averages-csv.ts";
import { agreementCsv, besideCsv } from "../averages/measured-csv.ts";
import { type CsvColumn, writeCsv } from "../export/csv.ts";
import type { ExportSet } from "../export/export-set.ts";
import { writeSdf } from "../export/sdf-writer.ts";
import { writeXyz } from "../export/xyz-writer.ts";
import { ENERGY_UNITS } from "../units.ts";
import type { EditionContent } from "./content.ts";
import { contentText } from "./content-text.ts";
import { editionFigures } from "./figures.ts";
import { measuredTables } from "./measured.ts";
import { measuredFigures } from "./measured-figures.ts";
import { type FrameEnergy, framesCsv, temperaturesCsv } from "./tables.ts";

/** A file of an edition, in pieces that are made as they are taken. */
export interface WrittenFile {
  name: string;
  pieces: Iterable<string>;
}

/**
 * The files that follow from the content of an edition and the coordinates of its conformers alone.
 *
 * @param positions packed [conformer][atom][x, y, z], in the order of `kept`
 * @param energies of every frame that took part, as stored; content 1 has no file of them
 * @example editionFiles(content, positions, energies).map(({ name }) => name) // "distinct-set.xyz", ...
 */
export function editionFiles(
  content: EditionContent,
  positions: Float64Array,
  energies: readonly FrameEnergy[],
): WrittenFile[] {
  const set = exportSet(content);
  const length = 3 * content.ensemble.atoms;
  const rowOf = new Map(content.kept.map(({ frame }, row) => [frame, row]));
  const positionsOf = (frame: number) => {
    const from = (rowOf.get(frame) ?? 0) * length;
    return positions.subarray(from, from + length);
  };
  const columns = content.columns.map(({ name, unit, values }) => ({ name, unit, values }));
  const properties = columns.filter((_, k) => content.columns[k]?.kind === "property");
  const { bonds, orders } = content.ensemble;
  return [
    { name: "distinct-set.xyz", pieces: writeXyz(set, positionsOf) },
    { name: "distinct-set.sdf", pieces: writeSdf(set, { bonds, orders }, positionsOf, properties) },
    { name: "results.csv", pieces: writeCsv(set, [...rangeColumns(content), ...columns]) },
    ...(content.averages === null
      ? []
      : [
          {
            name: "averages.csv",
            pieces: [
              averagesCsv(content.averages.map((row) => ({ ...row, uncertainty: row.error?.sd ?? null }))),
            ],
          },
        ]),
    ...(content.measured === undefined && content.measuredProperties === undefined
      ? []
      : [
          {
            name: "measured.csv",
            pieces: [besideCsv(measuredTables(content), null, measuredFigures(content))],
          },
          {
            name: "agreement.csv",
            pieces: [agreementCsv(measuredTables(content), null, measuredFigures(content))],
          },
        ]),
    ...(content.temperatures === null
      ? []
      : [{ name: "temperatures.csv", pieces: temperaturesCsv(content, content.temperatures) }]),
    ...(content.version === 1 ? [] : [{ name: "frames.csv", pieces: framesCsv(content, energies) }]),
    { name: "results.json", pieces: [contentText(content)] },
    { name: "methods.txt", pieces: [`${content.words.methods}\n\n${content.caution}\n`] },
    ...(content.version === 1
      ? []
      : editionFigures(content, positions).map(({ name, svg }) => ({ name, pieces: [svg] }))),
  ];
}

/** What the draws say of each conformer, before the columns of the ensemble. */
function rangeColumns({ uncertainty }: EditionContent): CsvColumn[] {
  if (uncertainty === null) return [];
  const { populations } = uncertainty;
  return [
    { name: "populationLow", unit: null, values: populations.map(({ low }) => low) },
    { name: "populationHigh", unit: null, values: populations.map(({ high }) => high) },
    { name: "lowestShare", unit: null, values: populations.map(({ lowest }) => lowest) },
  ];
}

/** The distinct set as the writers take it. Its id stands in none of these files. */
function exportSet(content: EditionContent): ExportSet {
  const { ensemble, inputs, level, recipe, kept, populations } = content;
  const unit = ENERGY_UNITS.find((one) => one === level?.unit);
  return {
    ensemble: { id: "", name: ensemble.name, formula: ensemble.formula },
    elements: ensemble.elements,
    isotopes: ensemble.isotopes,
    atomLabels: ensemble.atomLabels,
    sources: inputs.files,
    level: level && unit ? { name: level.name, unit, energyKind: level.energyKind } : null,
    recipe: { ...recipe, level: level?.name ?? null },
    temperature: populations?.temperature ?? 0,
    weights: populations?.weights ?? null,
    conformers: kept.map((conformer, row) => ({
      ...conformer,
      population: populations?.values[row]?.population ?? null,
    })),
  };
}

/** What each file holds, in words, and the name of its format. */
export const FILE_WORDS: Record<string, { title: string; format: string }> = {
  "distinct-set.xyz": { title: "Distinct set", format: "XYZ" },
  "distinct-set.sdf": { title: "Distinct set", format: "SDF" },
  "results.csv": { title: "Populations and properties", format: "CSV" },
  "averages.csv": { title: "Averages", format: "CSV" },
  "measured.csv": { title: "Averages beside measured values", format: "CSV" },
  "agreement.csv": { title: "Errors against measured values", format: "CSV" },
  "temperatures.csv": { title: "Several temperatures", format: "CSV" },
  "frames.csv": { title: "What became of every frame", format: "CSV" },
  "figure-shapes.svg": { title: "Figure: shapes", format: "SVG" },
  "figure-energy-ladder.svg": { title: "Figure: energy ladder", format: "SVG" },
  "figure-cumulative-population.svg": { title: "Figure: cumulative population", format: "SVG" },
  "figure-population-ranges.svg": { title: "Figure: populations with ranges", format: "SVG" },
  "figure-temperatures.svg": { title: "Figure: populations against temperature", format: "SVG" },
  "results.json": { title: "All results with recipe", format: "JSON" },
  "methods.txt": { title: "Methods text", format: "text" },
  "citation.bib": { title: "Citation", format: "BibTeX" },
  "CITATION.cff": { title: "Citation", format: "CFF" },
  "manifest.json": { title: "Manifest of the bundle", format: "JSON" },
  "bundle.zip": { title: "Bundle with checksums", format: "zip" },
  "figures.zip": { title: "All figures", format: "zip" },
  "conformers.zip": { title: "One file a conformer, for the next program", format: "zip" },
};
