import type { MeasuredProperties, MeasuredRecord } from "../averages/averaging.ts";
import type { PropertyValues } from "../averages/property-set.ts";
import { RULE_WORDS } from "../averages/rule.ts";
import { CAUTION } from "../export/json.ts";
import { formatCount, formatEnergy, plural, withUnit } from "../format.ts";
import { type OutsideMethod, outsideMethods } from "../outside/methods-text.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { SiftResult } from "../recipe/result.ts";
import { distinctPopulations } from "../thermo/populations.ts";
import type { SearchView } from "../trust/trust-view.ts";
import { CONSTANTS_YEAR } from "../units.ts";
import { joinWords } from "../workbench/findings.ts";
import type { EditionContent, EditionPopulations, OpenItem } from "./content.ts";
import { shapeExtent } from "./extent.ts";
import { editionFindings } from "./findings.ts";
import { measuredSection, measuredSentences } from "./measured.ts";
import { figuresSection, figuresSentence } from "./measured-figures.ts";
import { methodsText } from "./methods-text.ts";
import { openItems } from "./open.ts";
import { editionRows } from "./rows.ts";
import { searchesSection, searchSentence } from "./searches.ts";
import { averagesSection, comparisonSections, samplingSection } from "./sections.ts";
import { editionSummary } from "./summary.ts";
import {
  type DrawnUncertainty,
  editionMoments,
  temperaturesSection,
  type UncertaintyInput,
  uncertaintySection,
} from "./uncertainty.ts";

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
  /** Which content is made: 1 as the first editions have it, to verify those; 2 now. */
  contentVersion: 1 | 2;
  /** Error of the level, kcal/mol; null draws nothing. */
  sigma: number | null;
  sigmaFrom: string | null;
  seed: number;
  /** K, beside `temperature`. */
  temperatures: readonly number[];
  /** Open at that moment, known from the state of the ensemble alone. */
  moment: readonly OpenItem[];
  /** Structures from outside that lie beside the ensemble. */
  outside: readonly OutsideMethod[];
  /** Which frames each search brought; of one alone nothing is kept. */
  searches: readonly SearchView[];
  /** Groups of equivalent atoms taken apart by hand, atoms from 1; `properties` are merged accordingly. */
  splits: readonly (readonly (readonly number[])[])[];
  /** Measured values, as they were entered. */
  measured: readonly MeasuredRecord[];
  measuredProperties: MeasuredProperties | null;
}

/** What is to be drawn for an edition; null where there are no populations or no error. */
export function uncertaintyInput(source: EditionSource): UncertaintyInput | null {
  const populations = populationsOf(source);
  const { sigma, seed, temperature, result, recipe, properties } = source;
  if (source.contentVersion === 1 || populations === null || sigma === null || sigma === 0) return null;
  return {
    energies: result.kept.map(({ relativeEnergy }) => relativeEnergy ?? 0),
    weights: populations.values.map(({ weight }) => weight),
    temperatureK: temperature,
    sigma,
    seed,
    moments: editionMoments(properties, result.kept, recipe),
  };
}

/**
 * Builds the content of an edition.
 *
 * @param drawn what was drawn from `uncertaintyInput(source)`; null where that is null
 * @example canonicalJson(buildContent(source, drawn)) // the bytes that are stored
 */
export function buildContent(source: EditionSource, drawn: DrawnUncertainty | null): EditionContent {
  const { level: _level, ...recipe } = source.recipe;
  const { result, contentVersion } = source;
  const populations = populationsOf(source);
  const moments = editionMoments(source.properties, result.kept, source.recipe);
  const first = contentVersion === 1;
  const averages = averagesSection(
    source.properties,
    moments,
    populations,
    first ? undefined : (drawn?.averages ?? null),
  );
  const measured = measuredSection(source.properties, averages, source.ensemble, source.measured);
  const figures = figuresSection(source.properties, averages, source.measuredProperties);
  const facts = {
    schema: "lowlying-edition" as const,
    version: contentVersion,
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
    averages,
    comparisons: comparisonSections(source.columns, source.recipe.levelName, populations),
    sampling: samplingSection(result.kept),
    searches: searchesSection(result, source.searches),
    ...(source.outside.length > 0 ? { outside: [...source.outside] } : {}),
    ...(source.splits.length > 0
      ? { splits: source.splits.map((parts) => parts.map((part) => [...part])) }
      : {}),
    ...(measured === undefined ? {} : { measured }),
    ...(figures === undefined ? {} : { measuredProperties: figures }),
    uncertainty: uncertaintySection(drawn, source.sigmaFrom),
    temperatures: first
      ? null
      : temperaturesSection({
          kelvin: source.temperatures,
          kept: result.kept,
          populations,
          moments,
          level: source.level,
        }),
  };
  const rows = editionRows(facts);
  const found = editionFindings(facts, rows);
  const words = { summary: editionSummary(facts, rows), methods: methodsOf(facts, source.version) };
  if (!first) {
    const open = openItems(facts, result, source.recipe, source.moment);
    // What is open is said once, there.
    const said = new Set(open.map(({ title }) => title));
    const know = found.filter(({ kind, title }) => kind === "know" && !said.has(title));
    return { ...facts, open, words, findings: know };
  }
  return { ...facts, open: [], words, findings: found };
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

function methodsOf(facts: Omit<EditionContent, "words" | "findings" | "open">, version: string): string {
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
  facts: Pick<
    EditionContent,
    | "averages"
    | "columns"
    | "comparisons"
    | "ensemble"
    | "kept"
    | "level"
    | "uncertainty"
    | "temperatures"
    | "outside"
    | "searches"
    | "splits"
    | "measured"
    | "measuredProperties"
  >,
) {
  const { averages, comparisons, level, uncertainty } = facts;
  const rules = [...new Set((averages ?? []).map(({ rule }) => RULE_WORDS[rule].name))];
  return [
    averages === null || averages.length === 0
      ? null
      : `${plural(averages.length, "property was", "properties were")} averaged over the conformers with these populations ` +
        `(${rules.length === 1 ? "rule" : "rules"}: ${joinWords(rules)}); what covers less than 90 % of the population is not averaged.`,
    ...measuredSentences(facts),
    figuresSentence(facts.measuredProperties),
    comparisons.length === 0
      ? null
      : `${level?.name ?? "The level"} was compared with ${joinWords(comparisons.map(({ reference }) => reference))} ` +
        "on the conformers that have both energies, after a least-squares offset.",
    uncertainty === null
      ? null
      : `Ranges hold 95 % of ${formatCount(uncertainty.draws)} draws of the energies with a normal error of ` +
        `${withUnit(formatEnergy(uncertainty.sigma), "kcal/mol")} each` +
        `${uncertainty.sigmaFrom === null ? "" : ` (the deviation from ${uncertainty.sigmaFrom})`}, ` +
        `in antithetic pairs (JCGM 101:2008; generator ${uncertainty.generator}, seed ${uncertainty.seed}).`,
    searchSentence(facts),
    ...(facts.outside ?? []).map(outsideMethods),
  ].filter((sentence) => sentence !== null);
}
