import {
  capital,
  formatCount,
  formatEnergy,
  formatTemperature,
  plural,
  pluralWord,
  withUnit,
} from "../format.ts";
import { samplingFindings } from "../trust/findings.ts";
import { samplingCoverage } from "../trust/sampling-coverage.ts";
import { thermalEnergyKcal } from "../units.ts";
import { byPopulation, type ConformerRow } from "../workbench/conformers.ts";
import { joinWords, shareWords } from "../workbench/findings.ts";
import type { EditionContent, EditionFinding } from "./content.ts";
import { lowestOf } from "./open.ts";

type Facts = Omit<EditionContent, "words" | "findings" | "open">;

const NAMED = 6;

/**
 * What limits the results of an edition, in sentences: what is for somebody to settle first. A frozen edition repeats them.
 *
 * @param rows the conformers of the content
 */
export function editionFindings(content: Facts, rows: readonly ConformerRow[]): EditionFinding[] {
  return [
    questions(content),
    ...lowest(content, rows),
    order(content, rows),
    energies(content),
    ...content.comparisons.map(against(content)),
    windowCut(content),
    leftOut(content),
    withoutEnergy(content),
    ...sampling(content),
    bounds(content),
  ].filter((finding) => finding !== null);
}

function questions({ ensemble }: Facts): EditionFinding | null {
  if (ensemble.openQuestions === 0) return null;
  const one = ensemble.openQuestions === 1;
  return {
    kind: "open",
    title: `${capital(pluralWord(ensemble.openQuestions, "question"))} of intake ${one ? "is" : "are"} not answered.`,
    text: "Frames that wait for an answer take no part in this edition.",
  };
}

/** Which shape is the lowest, where the error of the level does not move it; else it is for somebody to settle. */
function lowest({ uncertainty }: Facts, rows: readonly ConformerRow[]): EditionFinding[] {
  if (uncertainty === null) return [];
  return lowestOf({
    names: rows.map(({ name }) => name),
    energies: rows.map(({ relativeEnergy }) => relativeEnergy ?? 0),
    drawn: uncertainty,
  })
    .filter(({ kind }) => kind !== "settle")
    .map(({ title, reason }) => ({ kind: "know", title, text: reason }));
}

/** The energy that would have to be wrong for the two most populated to change places: RT ln(p1/p2). */
function order(content: Facts, rows: readonly ConformerRow[]): EditionFinding | null {
  const [first, second] = byPopulation(rows);
  if (content.populations === null || !first?.population || !second?.population) return null;
  const rt = thermalEnergyKcal(content.populations.temperature);
  const gap = rt * Math.log(first.population / second.population);
  return {
    kind: "know",
    title: `Order of ${first.name} and ${second.name}.`,
    text:
      gap < 0.005
        ? "They are equally populated."
        : `They change places when the energy between them is off by ${withUnit(formatEnergy(gap), "kcal/mol")}.`,
  };
}

function energies({ level, populations }: Facts): EditionFinding | null {
  if (level === null) {
    return {
      kind: "know",
      title: "No energies.",
      text: "The distinct set stands in file order, and no populations can be given.",
    };
  }
  const at = populations ? ` at ${withUnit(formatTemperature(populations.temperature), "K")}` : "";
  const taken = level.kindStated
    ? ""
    : " They were taken as electronic, since nobody said which kind they are.";
  const words = {
    electronic: "Electronic energies: vibrations and, unless the level holds it, solvent are left out.",
    "zero-point": "Energies with zero-point vibration: thermal motion is left out.",
    enthalpy: "Enthalpies: entropies of the single conformers are left out.",
    free: `Free energies${level.temperature === null ? "" : ` of ${withUnit(formatTemperature(level.temperature), "K")}`}.`,
  }[level.energyKind];
  return { kind: "know", title: `Energies of ${level.name}${at}.`, text: `${words}${taken}` };
}

function windowCut({ recipe, outsideWindow, populations }: Facts): EditionFinding | null {
  if (recipe.window === null) return null;
  const bound = populations ? Math.exp(-recipe.window / thermalEnergyKcal(populations.temperature)) : null;
  return {
    kind: "know",
    title: "Window.",
    text:
      `${capital(plural(outsideWindow.length, "frame"))} above ${withUnit(formatEnergy(recipe.window), "kcal/mol")} ` +
      `${outsideWindow.length === 1 ? "was" : "were"} left out` +
      `${bound === null ? "." : `; each copy missing there would weigh at most ${shareWords(bound)} of the lowest conformer.`}`,
  };
}

function leftOut({ held, ensemble }: Facts): EditionFinding | null {
  if (held.length === 0) return null;
  const reasons = new Map<string, number[]>();
  for (const { frame, reason } of held) reasons.set(reason, [...(reasons.get(reason) ?? []), frame]);
  const groups = [...reasons].slice(0, NAMED).map(([reason, frames]) => {
    const some = frames.slice(0, NAMED).join(", ");
    return `${reason.replace(/\.$/, "")} (${some}${frames.length > NAMED ? `, ${frames.length - NAMED} more` : ""})`;
  });
  const more = reasons.size > NAMED ? `; ${plural(reasons.size - NAMED, "further reason")}` : "";
  return {
    kind: "know",
    title: "Left out.",
    text: `${formatCount(held.length)} of ${plural(ensemble.frames, "frame")} ${held.length === 1 ? "is" : "are"} held: ${groups.join("; ")}${more}.`,
  };
}

function withoutEnergy({ withoutEnergy: frames }: Facts): EditionFinding | null {
  if (frames.length === 0) return null;
  const some = joinWords(frames.slice(0, NAMED).map(String));
  const more = frames.length > NAMED ? ` and ${frames.length - NAMED} more` : "";
  return {
    kind: "know",
    title: "Without energy.",
    text: `${capital(plural(frames.length, "accepted frame"))} ${frames.length === 1 ? "has" : "have"} no energy at this level and ${frames.length === 1 ? "takes" : "take"} no part: ${some}${more}.`,
  };
}

/** How the level stands against another one. */
function against({ level }: Facts) {
  return ({ reference, n, mad, populationOverlap }: Facts["comparisons"][number]): EditionFinding => ({
    kind: "know",
    title: `Against ${reference}.`,
    text:
      `${level?.name ?? "The level"} deviates by ${withUnit(formatEnergy(mad), "kcal/mol")} on average ` +
      `(${plural(n, "conformer")}); ${shareWords(populationOverlap)} of the population is shared.`,
  });
}

/** How complete the search is, in the sentence of Trust. */
function sampling({ kept, searches }: Facts): EditionFinding[] {
  const coverage = samplingCoverage(kept.map(({ found }) => found));
  return samplingFindings({ coverage, searches: searches?.pair ?? null }).map(({ title, reason }) => ({
    kind: "know",
    title,
    text: reason,
  }));
}

function bounds({ kept, dropped }: Facts): EditionFinding | null {
  const count = [...kept, ...dropped].filter(({ upperBound }) => upperBound === true).length;
  if (count === 0) return null;
  return {
    kind: "open",
    title: "Bounded distances.",
    text: `For ${plural(count, "frame")} the search over equivalent atoms met its bound: their RMSD is an upper bound, and a repeat may have been kept.`,
  };
}
