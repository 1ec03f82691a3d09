import {
  capital,
  countWord,
  fixed,
  formatCount,
  formatEnergy,
  formatPercent,
  formatTemperature,
  plural,
  pluralWord,
  withUnit,
} from "../format.ts";
import { populationOverlap } from "../levels/overlap.ts";
import { WIDE_RMSD_TOLERANCE } from "../recipe/recipe.ts";
import type { EnergyKind } from "../views.ts";
import { joinWords, shareWords } from "../workbench/findings.ts";
import type { PopulationError } from "./population-error.ts";
import type { Coverage, TwoSearches } from "./sampling-coverage.ts";
import type { HandCount } from "./searches.ts";

/** Three kinds and no score: what a person has to settle, what is good to know, what needs nothing. */
export type FindingKind = "settle" | "know" | "nothing";

/** What to do about it: a section to go to, or a level to weigh by. */
export type FindingAct =
  | { type: "section"; path: string; label: string; note: string }
  | { type: "weigh"; level: string; label: string; note: string };

export interface TrustFinding {
  kind: FindingKind;
  title: string;
  reason: string;
  act: FindingAct | null;
}

/** Everything that bears on trust, by position among the weighed conformers. */
export interface TrustInput {
  names: readonly string[];
  energies: ArrayLike<number>;
  populations: ArrayLike<number>;
  /** Frames that show each conformer. */
  found: readonly number[];
  temperatureK: number;
  level: { name: string; energyKind: EnergyKind; temperatureK: number | null };
  /** Null without a level error. */
  error: { sigmaKcal: number; drawn: PopulationError } | null;
  /** Further levels: kcal/mol, null where missing; populations at the same temperature over those that have one. */
  others: readonly {
    id: string;
    name: string;
    energies: readonly (number | null)[];
    populations: ArrayLike<number> | null;
  }[];
  coverage: Coverage | null;
  searches: TwoSearches | null;
  /** Mirror pairs by how often each hand was found; empty where images are kept apart. */
  hands: readonly HandCount[];
  /** Window that the reader set, what lies above it, and the bound of what a missing copy there would weigh. */
  window: { kcal: number; count: number; share: number; bound: number } | null;
  /** Window of the sift itself with the frames it left out, and the same bound. */
  cut: { kcal: number; frames: number; bound: number } | null;
  held: readonly { frame: number; reason: string }[];
  /** Conformers whose own mirror image lies near the tolerance. */
  nearMirror: readonly { name: string; rmsd: number; population: number }[];
  chirality: "achiral" | "chiral" | "unsure";
  /** Distinct conformers at about half, at once and at about twice the tolerance; null until counted. */
  tolerance: { at: number; now: number; half: [number, number]; double: [number, number] } | null;
}

const SURE = 0.95;
/** A count that moves by no more than this share with the tolerance counts as steady (our choice; no source). */
const STEADY = 0.1;

/**
 * The findings on how far a distinct set and its populations can be trusted, in the order of their kinds.
 *
 * @example trustFindings(input).filter((finding) => finding.kind === "settle").length
 */
export function trustFindings(input: TrustInput): TrustFinding[] {
  const found = [
    ...lowestFindings(input),
    ...levelFindings(input),
    ...energyKindFindings(input),
    ...chiralityFindings(input),
    ...samplingFindings(input),
    ...handFindings(input),
    ...windowFindings(input),
    ...toleranceFindings(input),
    ...repeatFindings(input),
    ...speciesFindings(input),
    ...digitFindings(input),
  ];
  const order: FindingKind[] = ["settle", "know", "nothing"];
  return order.flatMap((kind) => found.filter((finding) => finding.kind === kind));
}

/** What the section says first, and how many findings there are of each kind. */
export function trustHeadline(
  input: TrustInput,
  findings: readonly TrustFinding[],
  top: { count: number; low: number; high: number } | null,
): { text: string; second: string } {
  const of = (kind: FindingKind) => findings.filter((finding) => finding.kind === kind).length;
  const parts = [
    of("settle") > 0
      ? `${pluralWord(of("settle"), "finding is", "findings are")} yours to settle`
      : "nothing is left to settle",
    of("know") > 0 ? `${countWord(of("know"))} ${of("know") === 1 ? "is" : "are"} good to know` : null,
    of("nothing") > 0
      ? `${countWord(of("nothing"))} ${of("nothing") === 1 ? "needs" : "need"} nothing`
      : null,
  ];
  return {
    text: [populationSentence(input, top), samplingSentence(input.coverage)].filter(Boolean).join(" "),
    second: `${capital(parts.filter((part) => part !== null).join(", "))}.`,
  };
}

function populationSentence(
  input: TrustInput,
  top: { count: number; low: number; high: number } | null,
): string | null {
  if (input.names.length === 1) return "There is one shape, and it holds the whole ensemble.";
  if (input.error === null || top === null) return null;
  const settled = Math.max(...input.error.drawn.lowestShare) >= SURE;
  const held =
    top.count === input.names.length
      ? null
      : `The ${top.count === 1 ? "most populated shape holds" : `${countWord(top.count)} likeliest shapes hold`} between ${formatPercent(top.low)} and ${formatPercent(top.high)} of the ensemble`;
  const lowest = settled ? `${lowestName(input)} is the lowest` : "which shape is the lowest is not settled";
  return held === null ? `${settled ? lowest : capital(lowest)}.` : `${held}; ${lowest}.`;
}

function lowestName({ names, error }: TrustInput): string {
  const shares = error?.drawn.lowestShare ?? new Float64Array();
  return names[shares.indexOf(Math.max(...shares))] ?? "c1";
}

function samplingSentence(coverage: Coverage | null): string | null {
  if (coverage === null) return null;
  if (coverage.once === coverage.hits) return "How complete the search is cannot be told from these frames.";
  if (coverage.coverage >= 0.98) return "The search has found nearly all it can find.";
  return `The next frame of this search would be a new shape in ${shareWords(1 - coverage.coverage)} of the cases.`;
}

/** Which shape is the lowest under the error of the level, for Trust and for editions alike. */
export function lowestFindings(
  input: Pick<TrustInput, "names" | "energies"> & {
    error: { sigmaKcal: number; drawn: Pick<PopulationError, "lowestShare" | "lowestSet"> } | null;
  },
): TrustFinding[] {
  const { error, names } = input;
  if (error === null || names.length < 2) return [];
  const { lowestShare, lowestSet } = error.drawn;
  const order = [...names.keys()].sort((a, b) => lowestShare[b]! - lowestShare[a]! || a - b);
  const [first, second] = order as [number, number];
  const one = names[first]!;
  const other = names[second]!;
  const gap = Math.abs(input.energies[first]! - input.energies[second]!);
  const both = Math.SQRT2 * error.sigmaKcal;
  const apart = `They lie ${withUnit(formatEnergy(gap), "kcal/mol")} apart; two errors of ± ${formatEnergy(error.sigmaKcal)} make ± ${formatEnergy(both)} in the difference. `;
  const draws = `${one} is the lowest in ${shareWords(lowestShare[first]!)} of the draws, ${other} in ${shareWords(lowestShare[second]!)}`;
  if (lowestShare[first]! >= SURE) {
    return [
      {
        kind: "nothing",
        title: `${one} is the lowest, whatever the level's error of ± ${formatEnergy(error.sigmaKcal)} kcal/mol.`,
        reason: `${draws}.`,
        act: null,
      },
    ];
  }
  const set = lowestSet.map((place) => names[place]!);
  const among =
    set.length > 2
      ? `, and one of ${set.length <= 6 ? joinWords(set) : `${formatCount(set.length)} shapes`} in 95 %`
      : "";
  return [
    {
      kind: "settle",
      title: `${one} and ${other} cannot be told apart.`,
      reason: `${apart}${draws}${among}.`,
      act: {
        type: "section",
        path: "levels",
        label: "Compare levels",
        note: `${plural(set.length, "shape")} to compute again`,
      },
    },
  ];
}

function levelFindings(input: TrustInput): TrustFinding[] {
  const lowest = placeOfLowest(Array.from(input.energies));
  return input.others.flatMap((other): TrustFinding[] => {
    const place = placeOfLowest(other.energies);
    const missing = other.energies.filter((energy) => energy === null).length;
    if (place === null || lowest === null || other.populations === null) return [];
    const overlap = populationOverlap(input.populations, other.populations);
    const there =
      missing === 0
        ? `its energies are there for all ${formatCount(input.names.length)}`
        : `${plural(missing, "shape has", "shapes have")} no energy there`;
    const shared = `The two levels share ${shareWords(overlap)} of the population, and ${there}.`;
    if (place === lowest) {
      return [
        { kind: "nothing", title: `${other.name} puts the same shape lowest.`, reason: shared, act: null },
      ];
    }
    const gap =
      (other.energies[lowest] ?? null) === null ? null : other.energies[lowest]! - other.energies[place]!;
    const by = gap === null ? "" : `, by ${withUnit(formatEnergy(gap), "kcal/mol")}`;
    return [
      {
        kind: "settle",
        title: `${other.name} puts another shape lowest.`,
        reason: `${input.names[place]} instead of ${input.names[lowest]}${by}. ${shared}`,
        act: {
          type: "weigh",
          level: other.id,
          label: `Weigh by ${other.name}`,
          note: "changes every figure",
        },
      },
    ];
  });
}

function placeOfLowest(energies: readonly (number | null)[]): number | null {
  let place: number | null = null;
  for (const [k, energy] of energies.entries()) {
    if (energy !== null && (place === null || energy < energies[place]!)) place = k;
  }
  return place;
}

function energyKindFindings({ level, temperatureK }: TrustInput): TrustFinding[] {
  if (level.temperatureK !== null && Math.abs(level.temperatureK - temperatureK) > 0.005) {
    return [
      {
        kind: "settle",
        title: `The energies of ${level.name} belong to ${formatTemperature(level.temperatureK)} K.`,
        reason: `Populations are shown at ${formatTemperature(temperatureK)} K, where these free energies do not hold.`,
        act: { type: "section", path: "populations", label: "Set the temperature", note: "" },
      },
    ];
  }
  if (level.energyKind !== "electronic") return [];
  return [
    {
      kind: "know",
      title: "The energies are electronic.",
      reason:
        "Zero-point and vibrational contributions are not in these populations; folded shapes often come out too populated.",
      act: null,
    },
  ];
}

function chiralityFindings({ chirality, nearMirror }: TrustInput): TrustFinding[] {
  const found: TrustFinding[] = [];
  if (chirality === "unsure") {
    found.push({
      kind: "settle",
      title: "It is not sure whether the molecule is chiral.",
      reason:
        "A stereocentre is nearly flat in the lowest frame. It is taken as chiral, so that mirror images stay apart.",
      act: {
        type: "section",
        path: "distinct-set",
        label: "Decide in the settings",
        note: "changes degeneracies",
      },
    });
  }
  const [first] = nearMirror;
  if (first !== undefined) {
    const share = nearMirror.reduce((total, one) => total + one.population, 0);
    const names =
      nearMirror.length <= 6
        ? joinWords(nearMirror.map((one) => one.name))
        : `${formatCount(nearMirror.length)} shapes`;
    found.push({
      kind: share >= 0.01 ? "settle" : "know",
      title: `The factor 2 of ${names} hangs on the RMSD tolerance.`,
      reason: `${nearMirror.length === 1 ? "Its" : "Their"} own mirror image lies near the tolerance (${first.name}: ${fixed(first.rmsd, 3)} Å). ${shareWords(share)} of the population.`,
      act: { type: "section", path: "distinct-set", label: "Look at the tolerance", note: "" },
    });
  }
  return found;
}

/**
 * How complete the search is, for Trust and for editions alike: they say the same of the same set. Where every shape was
 * found once there is no estimate.
 *
 * @example samplingFindings({ coverage: samplingCoverage([1, 1, 1]), searches: null })[0]?.title // "How complete the search is cannot be told."
 */
export function samplingFindings({
  coverage,
  searches,
}: Pick<TrustInput, "coverage" | "searches">): TrustFinding[] {
  if (coverage === null) return [];
  if (coverage.once === coverage.hits && coverage.hits > 1) {
    return [
      {
        kind: "know",
        title: "How complete the search is cannot be told.",
        reason:
          "Every shape was found once. Either repeats were removed before the files came here, or the search has hardly begun: with the raw search there would be an answer.",
        act: { type: "section", path: "intake", label: "Add the raw search", note: "" },
      },
    ];
  }
  const { richness, distinct, once } = coverage;
  const missing = richness.estimate - distinct;
  const estimate = Math.round(richness.estimate);
  const estimated = searches ? fixed(searches.estimate, 1) : null;
  const between = estimated === null ? "" : ` Two searches against each other estimate ${estimated}.`;
  // Two estimates stand beside each other: say from what each comes, and which to go by.
  const beside =
    estimated === null
      ? ""
      : ` From what two searches have in common the estimate is ${estimated}; both tend to be too low, so the larger one counts.`;
  if (once === 0 || missing < 0.5) {
    return [
      {
        kind: "nothing",
        title: "Nothing points to a missing shape.",
        reason: `${once === 0 ? "Every shape was found more than once" : `Coverage of the search is ${formatPercent(coverage.coverage, 1)}`}: no evidence of missing ones, which is no proof that there are none.${between}`,
        act: null,
      },
    ];
  }
  return [
    {
      kind: coverage.coverage < 0.9 ? "settle" : "know",
      title: `${capital(missing < 12.5 ? `${countWord(Math.max(1, Math.round(missing)))} or so ${Math.round(missing) <= 1 ? "shape is" : "shapes are"}` : `${formatCount(Math.round(missing))} or so shapes are`)} probably missing.`,
      reason: `Coverage of the search is ${formatPercent(coverage.coverage, 1)}; from how often each shape was found at least ${formatCount(estimate)} exist; ${formatCount(distinct)} were found, ${countWord(once)} of them once.${beside} What is missing is rare in the search, not necessarily in the flask.`,
      act: {
        type: "section",
        path: "intake",
        label: "Add a second search",
        note: `${plural(coverage.hits, "more frame")}: about ${formatCount(Math.max(0, Math.round(newShapes(coverage))))} new`,
      },
    },
  ];
}

/** New conformers that as many hits again would find (the extrapolation of `rarefied`). */
function newShapes({ hits, once, distinct, richness }: Coverage): number {
  const unseen = richness.estimate - distinct;
  return unseen > 0 ? unseen * (1 - (1 - once / (hits * unseen + once)) ** hits) : 0;
}

function handFindings({ hands, names, populations }: TrustInput): TrustFinding[] {
  if (hands.length === 0) return [];
  const single = hands.filter((count) => count.own === 0 || count.other === 0);
  if (single.length === 0) {
    return [
      {
        kind: "nothing",
        title: "Every mirror pair was found in both hands.",
        reason: `${capital(pluralWord(hands.length, "pair"))}; each counts twice because the molecule is achiral.`,
        act: null,
      },
    ];
  }
  const share = single.reduce((total, count) => total + (populations[count.place] ?? 0), 0);
  const list = single.slice(0, 8).map((count) => names[count.place] ?? "");
  const more =
    single.length > 8 ? `${list.join(", ")} and ${formatCount(single.length - 8)} more` : joinWords(list);
  return [
    {
      kind: "know",
      title: `${capital(pluralWord(single.length, "shape was", "shapes were"))} found in one hand only.`,
      reason: `${more}. Each counts as a pair all the same, since the molecule is achiral. It shows where the search was thin: ${shareWords(share)} of the population.`,
      act: null,
    },
  ];
}

function windowFindings({ window, cut }: TrustInput): TrustFinding[] {
  const found: TrustFinding[] = [];
  if (cut !== null) {
    found.push({
      kind: cut.bound >= 0.01 ? "know" : "nothing",
      title: `The sift left out ${plural(cut.frames, "frame")} above ${withUnit(formatEnergy(cut.kcal), "kcal/mol")}.`,
      reason: `A copy missing there would hold at most ${shareWords(cut.bound)} of what the lowest shape holds. How many are missing is not known.`,
      act: { type: "section", path: "distinct-set", label: "Widen the window", note: "" },
    });
  }
  if (window !== null && window.count > 0) {
    found.push({
      kind: "know",
      title: `The window leaves out ${shareWords(window.share)}.`,
      reason: `${capital(pluralWord(window.count, "conformer"))} above ${withUnit(formatEnergy(window.kcal), "kcal/mol")}. A shape nobody found above it would hold at most ${shareWords(window.bound)} of what the lowest holds.`,
      act: null,
    });
  }
  return found;
}

function toleranceFindings({ tolerance }: TrustInput): TrustFinding[] {
  if (tolerance === null) return [];
  const { at, now, half, double } = tolerance;
  const words = `${formatCount(now)} shapes at ${fixed(at, 2)} Å, ${formatCount(half[1])} at ${fixed(half[0], 2)} Å, ${formatCount(double[1])} at ${fixed(double[0], 2)} Å.`;
  if (at > WIDE_RMSD_TOLERANCE) {
    return [
      {
        kind: "settle",
        title: "The RMSD tolerance is so wide that different shapes merge.",
        reason: `${words} Above ${WIDE_RMSD_TOLERANCE} Å that is to be expected (common practice, no source); how complete the search is cannot be told then.`,
        act: { type: "section", path: "distinct-set", label: "Look at the tolerance", note: "" },
      },
    ];
  }
  const steady = Math.abs(half[1] - now) <= STEADY * now && Math.abs(double[1] - now) <= STEADY * now;
  if (steady) {
    return [
      { kind: "nothing", title: "The count does not hang on the tolerance.", reason: words, act: null },
    ];
  }
  return [
    {
      kind: "know",
      title: "The number of shapes hangs on the RMSD tolerance.",
      reason: `${words} Completeness and effective numbers hang on it too; populations of well-separated shapes do not.`,
      act: { type: "section", path: "distinct-set", label: "Look at the plateau", note: "" },
    },
  ];
}

function repeatFindings({ found, names, populations }: TrustInput): TrustFinding[] {
  const total = found.reduce((sum, count) => sum + count, 0);
  const most = found.indexOf(Math.max(...found));
  if (total === found.length || most < 0) return [];
  return [
    {
      kind: "nothing",
      title: "Repeats are not weighed.",
      reason: `${names[most]} was found ${formatCount(found[most]!)} times in ${formatCount(total)} frames. As a weight that would give it ${shareWords(found[most]! / total)} instead of ${shareWords(populations[most]!)}.`,
      act: null,
    },
  ];
}

function speciesFindings({ held }: TrustInput): TrustFinding[] {
  if (held.length === 0) {
    return [
      {
        kind: "nothing",
        title: "No other species is averaged in.",
        reason: "Every frame has the bonds and the configuration of the molecule; none is held.",
        act: null,
      },
    ];
  }
  const frames = held.slice(0, 3).map(({ frame }) => String(frame));
  const more = held.length > 3 ? ` and ${formatCount(held.length - 3)} more` : "";
  return [
    {
      kind: "nothing",
      title: "No other species is averaged in.",
      reason: `${held.length === 1 ? "Frame" : "Frames"} ${more === "" ? joinWords(frames) : `${frames.join(", ")}${more}`} ${held.length === 1 ? "is" : "are"} held and ${held.length === 1 ? "takes" : "take"} no part.`,
      act: { type: "section", path: "intake", label: "See why", note: "" },
    },
  ];
}

function digitFindings({ energies, names }: TrustInput): TrustFinding[] {
  const seen = new Map<number, number>();
  for (let k = 0; k < energies.length; k++) {
    const before = seen.get(energies[k]!);
    if (before !== undefined) {
      return [
        {
          kind: "know",
          title: "Two shapes have the very same energy.",
          reason: `${names[before]} and ${names[k]}, to the last digit of the file. Digits may have been lost on the way here, or an energy was copied.`,
          act: { type: "section", path: "distinct-set", label: "Look at them", note: "" },
        },
      ];
    }
    seen.set(energies[k]!, k);
  }
  return [
    {
      kind: "nothing",
      title: "No digits were lost.",
      reason: "No two conformers share an energy to the last digit.",
      act: null,
    },
  ];
}

/** The findings as plain text, for a report. */
export function findingsText(findings: readonly TrustFinding[]): string {
  const names: Record<FindingKind, string> = {
    settle: "Yours to settle",
    know: "Good to know",
    nothing: "Nothing to do",
  };
  return (["settle", "know", "nothing"] as const)
    .flatMap((kind) => {
      const of = findings.filter((finding) => finding.kind === kind);
      return of.length === 0
        ? []
        : [`${names[kind]}:`, ...of.map(({ title, reason }) => `- ${title} ${reason}`), ""];
    })
    .join("\n");
}
