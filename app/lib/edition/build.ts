import type { PropertyValues } from "../averages/property-set.ts";
import { RULE_WORDS } from "../averages/rule.ts";
import { CAUTION } from "../export/json.ts";
import { plural } from "../format.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { SiftResult } from "../recipe/result.ts";
import { distinctPopulations } from "../thermo/populations.ts";
import { CONSTANTS_YEAR } from "../units.ts";
import { joinWords } from "../workbench/findings.ts";
import type { EditionContent, EditionPopulations } from "./content.ts";
import { averagedProperties } from "./counters.ts";
import { shapeExtent } from "./extent.ts";
import { editionFindings } from "./findings.ts";
import { methodsText } from "./methods-text.ts";
import { editionRows } from "./rows.ts";
import { averagesSection, comparisonSections, samplingSection } from "./sections.ts";
import { editionSummary } from "./summary.ts";

/** Everything that an edition is built from; the same source gives the same content. */
export interface EditionSource {
  team: string;
  ensemble: EditionContent["ensemble"];
  inputs: EditionContent["inputs"];
  level: EditionContent["level"];
  recipe: SiftRecipe;
  result: Omit<SiftResult, "seconds">;
  /** In the order of `result.kept`. */
  labels: readonly (string | null)[];
  energies: readonly (number | null)[];
  positions: Float64Array;
  temperature: number;
  weights: "auto" | "copies" | "degeneracy";
  columns: EditionContent["columns"];
  /** Property columns with the values of equivalent atoms merged. */
  properties: readonly PropertyValues[];
  version: string;
}

/**
 * Builds the content of an edition.
 *
 * @example canonicalJson(buildContent(source)) // the bytes that are stored
 */
export function buildContent(source: EditionSource): EditionContent {
  const { level: _level, ...recipe } = source.recipe;
  const { result } = source;
  const populations = populationsOf(source);
  const facts = {
    schema: "lowlying-edition" as const,
    version: 1 as const,
    caution: CAUTION,
    constants: CONSTANTS_YEAR,
    units: {
      energy: source.level?.unit ?? null,
      relativeEnergy: "kcal/mol",
      length: "Å",
      temperature: "K",
      population: "fraction",
      entropy: "cal/(mol K)",
    },
    team: source.team,
    ensemble: source.ensemble,
    inputs: source.inputs,
    level: source.level,
    recipe,
    kept: keptOf(source),
    dropped: droppedOf(source),
    held: result.held.map(({ frame, reason }) => ({ frame, reason })),
    outsideWindow: result.outsideWindow,
    withoutEnergy: result.withoutEnergy,
    pairsExamined: result.pairsExamined,
    populations,
    columns: source.columns,
    averages: averagesSection(source.properties, result.kept, source.recipe, populations),
    comparisons: comparisonSections(source.columns, source.recipe.levelName, populations),
    sampling: samplingSection(result.kept),
  };
  const rows = editionRows(facts);
  return {
    ...facts,
    words: { summary: editionSummary(facts, rows), methods: methodsOf(facts, source.version) },
    findings: editionFindings(facts, rows),
  };
}

function keptOf({ result, labels, energies, positions, ensemble }: EditionSource): EditionContent["kept"] {
  const length = 3 * ensemble.atoms;
  return result.kept.map((kept, row) => ({
    frame: kept.frame,
    relativeEnergy: kept.relativeEnergy,
    degeneracy: kept.degeneracy,
    symmetryNumber: kept.symmetryNumber,
    copies: kept.copies,
    mirrorRmsd: kept.mirrorRmsd,
    found: kept.found,
    label: labels[row] ?? null,
    energy: energies[row] ?? null,
    extent: shapeExtent(ensemble.elements, positions.subarray(row * length, (row + 1) * length)),
    ...(kept.upperBound === undefined ? {} : { upperBound: kept.upperBound }),
  }));
}

function droppedOf({ result }: EditionSource): EditionContent["dropped"] {
  return result.dropped.map(({ frame, repeats, rmsd, energyDifference, mirror, upperBound }) => ({
    frame,
    repeats,
    rmsd,
    energyDifference,
    ...(mirror === undefined ? {} : { mirror }),
    ...(upperBound === undefined ? {} : { upperBound }),
  }));
}

function populationsOf(source: EditionSource): EditionPopulations | null {
  if (source.level === null) return null;
  const { result, level, temperature, weights } = source;
  const weighed = distinctPopulations(result.kept, level.energyKind, temperature, weights);
  if (weighed === null) return null;
  const { freeEnergy, energy, entropy, heatCapacity, effectiveCount } = weighed;
  return {
    temperature,
    weights: weighed.weights.kind,
    weightsReason: weighed.weights.reason,
    weightsChosen: weights !== "auto",
    values: Array.from(weighed.populations, (population, row) => ({
      weight: weighed.weights.values[row] ?? 0,
      population,
    })),
    freeEnergy,
    energy,
    entropy,
    heatCapacity,
    effectiveCount,
  };
}

function methodsOf(facts: Omit<EditionContent, "words" | "findings">, version: string): string {
  const { ensemble, kept, dropped, populations } = facts;
  const bounded = [...kept, ...dropped].filter(({ upperBound }) => upperBound === true).length;
  const { text, assumptions } = methodsText({
    formula: ensemble.formula,
    atoms: ensemble.atoms,
    files: facts.inputs.files,
    frames: ensemble.frames,
    accepted: ensemble.accepted,
    held: facts.held.length,
    recipe: facts.recipe,
    kept: kept.length,
    dropped: dropped.length,
    outsideWindow: facts.outsideWindow.length,
    withoutEnergy: facts.withoutEnergy.length,
    upperBounds: bounded,
    level: facts.level,
    populations,
    further: furtherSentences(facts),
    version,
  });
  return [text, ...assumptions.map((assumption) => `Assumed: ${assumption}`)].join("\n");
}

/** Sentences of the methods text on what the edition holds beside populations. */
function furtherSentences(
  facts: Pick<EditionContent, "averages" | "columns" | "comparisons" | "kept" | "level">,
) {
  const { comparisons, level } = facts;
  const averages = averagedProperties(facts);
  const rules = [...new Set((averages ?? []).map(({ rule }) => RULE_WORDS[rule].name))];
  return [
    averages === null || averages.length === 0
      ? null
      : `${plural(averages.length, "property was", "properties were")} averaged over the conformers with these populations ` +
        `(${rules.length === 1 ? "rule" : "rules"}: ${joinWords(rules)}); what covers less than 90 % of the population is not averaged.`,
    comparisons.length === 0
      ? null
      : `${level?.name ?? "The level"} was compared with ${joinWords(comparisons.map(({ reference }) => reference))} ` +
        "on the conformers that have both energies, after a least-squares offset.",
  ].filter((sentence) => sentence !== null);
}
