import { capital, formatCount, plural, pluralWord } from "../format.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { SiftResult } from "../recipe/result.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { chooseWeights } from "../thermo/populations.ts";
import { lowestFindings, type TrustFinding, type TrustInput, trustFindings } from "../trust/findings.ts";
import { samplingCoverage } from "../trust/sampling-coverage.ts";
import { thermalEnergyKcal } from "../units.ts";
import { conformerName } from "../workbench/conformers.ts";
import { nearMirror } from "../workbench/findings.ts";
import type { EditionContent, OpenItem } from "./content.ts";
import { relativeEnergies } from "./sections.ts";
import type { DrawnUncertainty } from "./uncertainty.ts";

type Facts = Omit<EditionContent, "words" | "findings" | "open">;

/** Codes of what only the state of the ensemble at that moment tells: a recomputation takes them as they were frozen. */
export const MOMENT_CODES = ["newer-sift", "sift-under-way"] as const;

/**
 * What nobody has settled yet, for whoever freezes and for whoever reads the edition: questions and frames of intake,
 * energies whose kind nobody stated, and what Trust leaves to a person.
 *
 * @param moment what only the state of the ensemble tells
 */
export function openItems(
  facts: Facts,
  result: Omit<SiftResult, "seconds">,
  recipe: SiftRecipe,
  moment: readonly OpenItem[],
): OpenItem[] {
  return [
    questions(facts),
    held(facts),
    ...moment,
    kindNotStated(facts),
    withoutEnergy(facts),
    ...trustItems(facts, result, recipe),
    bounds(facts),
  ].filter((item) => item !== null);
}

function questions({ ensemble }: Facts): OpenItem | null {
  const count = ensemble.openQuestions;
  if (count === 0) return null;
  return {
    code: "questions",
    title: `${capital(pluralWord(count, "question"))} of intake ${count === 1 ? "is" : "are"} not answered.`,
    text: "Frames that wait for an answer take no part.",
    section: "intake",
  };
}

function held({ held: frames }: Facts): OpenItem | null {
  const [first] = frames;
  if (first === undefined) return null;
  const reasons = new Map<string, number>();
  for (const { reason } of frames) reasons.set(reason, (reasons.get(reason) ?? 0) + 1);
  const said = [...reasons].slice(0, 3).map(([reason, count]) => {
    const words = reason.replace(/\.$/, "");
    return reasons.size === 1 ? words : `${words} (${formatCount(count)})`;
  });
  const more = reasons.size > 3 ? `; ${plural(reasons.size - 3, "further reason")}` : "";
  return {
    code: "held",
    title: `${capital(pluralWord(frames.length, "frame is", "frames are"))} held.`,
    text: `${said.join("; ")}${more}. ${frames.length === 1 ? "It takes" : "They take"} no part until somebody decides.`,
    section: "intake",
  };
}

function kindNotStated({ level }: Facts): OpenItem | null {
  if (level === null || level.kindStated) return null;
  return {
    code: "kind-not-stated",
    title: `Nobody said which energies those of ${level.name} are.`,
    text: "They were taken as electronic. If they are enthalpies or free energies, populations change.",
    section: "levels",
  };
}

function withoutEnergy({ withoutEnergy: frames, level }: Facts): OpenItem | null {
  if (frames.length === 0) return null;
  return {
    code: "without-energy",
    title: `${capital(pluralWord(frames.length, "accepted frame has", "accepted frames have"))} no energy.`,
    text: `Without one at ${level?.name ?? "this level"} ${frames.length === 1 ? "it takes" : "they take"} no part.`,
    section: "levels",
  };
}

function bounds({ kept, dropped }: Facts): OpenItem | null {
  const count = [...kept, ...dropped].filter(({ upperBound }) => upperBound === true).length;
  if (count === 0) return null;
  return {
    code: "bounded",
    title: "Some distances are only bounded.",
    text: `For ${plural(count, "frame")} the search over equivalent atoms met its bound: their RMSD is an upper bound, and a repeat may have been kept.`,
    section: "distinct-set",
  };
}

/** What Trust leaves to a person, in its own words. */
function trustItems(facts: Facts, result: Omit<SiftResult, "seconds">, recipe: SiftRecipe): OpenItem[] {
  const { populations, level } = facts;
  if (populations === null || level === null) return [];
  const { uncertainty, kept } = facts;
  const lowest =
    uncertainty === null
      ? []
      : lowestOf({
          names: kept.map((_, row) => conformerName(row)),
          energies: kept.map(({ relativeEnergy }) => relativeEnergy ?? 0),
          drawn: uncertainty,
        });
  return [...lowest, ...trustFindings(trustInput(facts, result, recipe))]
    .filter(({ kind }) => kind === "settle")
    .map(asItem);
}

function asItem({ title, reason, act }: TrustFinding): OpenItem {
  const section = act === null ? "trust" : act.type === "section" ? act.path : "levels";
  return { code: "trust", title, text: reason, section };
}

/** What Trust needs of the draws to say which shape is the lowest. */
export interface LowestInput {
  names: readonly string[];
  energies: ArrayLike<number>;
  drawn: Pick<DrawnUncertainty, "sigma" | "populations" | "lowestSet">;
}

/**
 * What the draws leave open: which shape is the lowest. The page says it before freezing, from draws of its own.
 *
 * @example lowestItems({ names, energies, drawn }) // [] where one is the lowest in 95 % of the draws
 */
export function lowestItems(input: LowestInput): OpenItem[] {
  return lowestOf(input)
    .filter(({ kind }) => kind === "settle")
    .map(asItem);
}

/** Trust's sentence on which shape is the lowest. */
export function lowestOf({ names, energies, drawn }: LowestInput): TrustFinding[] {
  const lowestShare = Float64Array.from(drawn.populations, ({ lowest }) => lowest);
  return lowestFindings({
    names,
    energies,
    error: { sigmaKcal: drawn.sigma, drawn: { lowestShare, lowestSet: drawn.lowestSet } },
  });
}

function trustInput(facts: Facts, result: Omit<SiftResult, "seconds">, recipe: SiftRecipe): TrustInput {
  const { kept, populations, level, columns, ensemble } = facts;
  const temperatureK = populations?.temperature ?? 0;
  const shares = populations?.values.map(({ population }) => population) ?? [];
  const rt = thermalEnergyKcal(temperatureK);
  const kind = level?.energyKind ?? "electronic";
  const weights = chooseWeights(result.kept, kind, populations?.weights).values;
  return {
    names: kept.map((_, row) => conformerName(row)),
    energies: kept.map(({ relativeEnergy }) => relativeEnergy ?? 0),
    populations: shares,
    found: kept.map(({ found }) => found),
    temperatureK,
    level: { name: level?.name ?? "", energyKind: kind, temperatureK: level?.temperature ?? null },
    error: null,
    others: columns
      .filter(
        ({ kind: what, name, values }) => what === "energy" && name !== level?.name && values.length > 0,
      )
      .flatMap((column) => {
        const energies = relativeEnergies(column);
        if (energies === null) return [];
        const populations = sharesOf(energies, weights, temperatureK);
        return [{ id: "", name: column.name, energies, populations }];
      }),
    coverage: samplingCoverage(kept.map(({ found }) => found)),
    searches: facts.searches?.pair ?? null,
    hands: [],
    window: null,
    cut:
      recipe.window === null
        ? null
        : {
            kcal: recipe.window,
            frames: result.outsideWindow.length,
            bound: Math.exp(-recipe.window / rt),
          },
    held: facts.held,
    nearMirror: nearMirror(result, recipe).map(({ frame, name, rmsd }) => ({
      name,
      rmsd,
      population: shares[kept.findIndex((one) => one.frame === frame)] ?? 0,
    })),
    chirality: recipe.chiralityOverridden ? recipe.chirality : ensemble.chirality,
    tolerance: null,
  };
}

/** Populations of another level over the conformers that have an energy there. */
function sharesOf(
  energies: readonly (number | null)[],
  weights: Float64Array,
  temperatureK: number,
): Float64Array | null {
  const having = energies.flatMap((energy, row) => (energy === null ? [] : [row]));
  if (having.length === 0) return null;
  const found = weigh(
    having.map((row) => energies[row] ?? 0),
    having.map((row) => weights[row] ?? 1),
    temperatureK,
  ).populations;
  const all = new Float64Array(energies.length);
  for (const [place, row] of having.entries()) all[row] = found[place] ?? 0;
  return all;
}
