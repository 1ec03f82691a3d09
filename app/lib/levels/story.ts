import { formatCount, formatEnergy, formatWindowToCarry, plural, withUnit } from "../format.ts";
import { joinWords, shareWords } from "../workbench/findings.ts";
import type { LevelComparison } from "./compare.ts";
import type { CoveredReference } from "./level-energies.ts";
import type { LowestMeeting } from "./ranking.ts";

/** What the comparison says in plain words. */
export interface Story {
  /** One sentence. */
  text: string;
  /** What backs it. */
  second: string;
}

/**
 * The comparison of two levels told in one sentence, for somebody who has read nothing else.
 *
 * @param names of the levels, and of each conformer by place
 * @param window that keeps the share (fraction), and the one that takes in a conformer more: it is printed rounded up
 * @example "MMFF94 puts the lowest conformer of B3LYP, c4, 3rd, 0.80 kcal/mol up; ..."
 */
export function comparisonStory(input: {
  level: string;
  reference: string;
  nameOf: (place: number) => string;
  comparison: LevelComparison;
  meeting: LowestMeeting;
  window: { share: number; kcal: number; count: number; next?: number };
  /** What of the reference has an energy at the level; all of it where left out. */
  covered?: CoveredReference;
}): Story {
  const { level, reference, comparison, meeting, window } = input;
  const { n } = comparison;
  if (n === 1) {
    return {
      text: `Only one conformer has an energy at both ${level} and ${reference}, so there is nothing to compare.`,
      second: "Bring the energies of the other conformers to see how far the levels agree.",
    };
  }
  const first =
    missingWords(input) + (constantWords(input) ?? (meeting.same ? sameLowest(input) : otherLowest(input)));
  const covered = input.covered?.covered ?? 1;
  const part = covered < 1 - 1e-9 ? ` that has an energy at ${level} (${shareWords(covered)} of it)` : "";
  const keep = `to keep ${shareWords(window.share)} of the ${reference} population${part}`;
  const carried = withUnit(formatWindowToCarry(window.kcal, window.next), "kcal/mol");
  const carry =
    window.count === n
      ? `${keep} takes all ${formatCount(n)} conformers, ${carried} of ${level}`
      : `${keep}, carry ${carried} of ${level}: ${formatCount(window.count)} of ${formatCount(n)} conformers`;
  return { text: `${first}; ${carry}.`, second: agreementWords(comparison) };
}

type StoryInput = Parameters<typeof comparisonStory>[0];

/** The reference's own lowest may have no energy at the level: then all that follows is about the others. */
function missingWords({ level, reference, covered }: StoryInput): string {
  if (!covered?.lowest) return "";
  const { name, share } = covered.lowest;
  return (
    `The lowest conformer of ${reference}, ${name} (${shareWords(share)} of its population), has no energy at ${level}, ` +
    `and shares are of the remaining ${shareWords(covered.covered)}: of the others, `
  );
}

/** A level that gives all the same energy has no lowest conformer and no order. */
function constantWords({ level, reference, comparison, meeting }: StoryInput): string | null {
  const { n } = comparison;
  const [flat, flatReference] = [meeting.levelTies.length === n, meeting.referenceTies.length === n];
  const all = `all ${formatCount(n)} conformers the same energy`;
  if (flat && flatReference)
    return `Both ${level} and ${reference} give ${all}, so there is no order to compare`;
  if (flat) return `${level} gives ${all} and finds no lowest one`;
  return flatReference ? `${reference} gives ${all}, so there is no lowest one for ${level} to find` : null;
}

/** Both have a conformer in common among their lowest. */
function sameLowest({ level, reference, nameOf, meeting }: StoryInput): string {
  const { levelTies, referenceTies } = meeting;
  const common = levelTies.filter((place) => referenceTies.includes(place));
  const names = listed(common.map(nameOf));
  const tied = (ties: readonly number[], name: string) =>
    `the ${formatCount(ties.length)} conformers that tie as the lowest of ${name}`;
  if (levelTies.length === 1 && referenceTies.length === 1)
    return `${level} finds the lowest conformer of ${reference}, ${names}`;
  if (levelTies.length === 1)
    return `${level} finds one of ${tied(referenceTies, reference)}, ${names}, and puts the others higher`;
  if (referenceTies.length === 1)
    return `${level} does not tell the lowest conformer of ${reference}, ${names}, from ${plural(levelTies.length - 1, "other")} that it puts as low`;
  return common.length === levelTies.length && common.length === referenceTies.length
    ? `${level} and ${reference} have the same ${formatCount(common.length)} conformers tied as the lowest, ${names}`
    : `${names} ${common.length === 1 ? "is" : "are"} among ${tied(levelTies, level)} and ${tied(referenceTies, reference)}`;
}

/** No conformer is lowest at both. */
function otherLowest({ level, reference, nameOf, comparison, meeting }: StoryInput): string {
  const { levelTies, referenceTies } = meeting;
  const held = levelTies.reduce((sum, place) => sum + (comparison.referencePopulations[place] ?? 0), 0);
  const prefers =
    levelTies.length === 1
      ? `prefers ${nameOf(meeting.levelLowest)}, which holds ${shareWords(held)} at ${reference}`
      : `prefers ${listed(levelTies.map(nameOf))}, tied, which hold ${shareWords(held)} at ${reference}`;
  const up = `${ordinal(meeting.rankAtLevel)}, ${kcal(meeting.aboveAtLevel)} up`;
  return referenceTies.length === 1
    ? `${level} puts the lowest conformer of ${reference}, ${nameOf(meeting.referenceLowest)}, ${up}, and ${prefers}`
    : `${level} puts ${nameOf(meeting.referenceLowest)}, the first of ${formatCount(referenceTies.length)} conformers that tie as the lowest of ${reference}, ${up}, and ${prefers}`;
}

/** Up to three names, the others counted. */
function listed(names: readonly string[]): string {
  return names.length <= 3
    ? joinWords(names)
    : `${names.slice(0, 2).join(", ")} and ${formatCount(names.length - 2)} more`;
}

function agreementWords({ n, kendall, populationOverlap, mad, max }: LevelComparison): string {
  const order = kendall === null ? "" : ` and ${orderWords(kendall)}`;
  return (
    `Over ${plural(n, "conformer")} the two levels share ${shareWords(populationOverlap)} of the population${order}; ` +
    `they differ by ${kcal(mad)} on average, ${kcal(max)} at most.`
  );
}

/**
 * How far two rankings agree, by tau-b; the bounds are our own.
 *
 * @example orderWords(0.2) // "hardly agree on the order"
 */
export function orderWords(tau: number): string {
  if (tau >= 0.999999) return "agree on the whole order";
  if (tau >= 0.8) return "agree closely on the order";
  if (tau >= 0.5) return "agree on the order in the main";
  if (tau >= 0.3) return "agree loosely on the order";
  if (tau > -0.3) return "hardly agree on the order";
  return "put the conformers rather in the opposite order";
}

/** "1st", "2nd", "3rd", "11th". */
export function ordinal(rank: number): string {
  const tens = rank % 100;
  const ending = tens >= 11 && tens <= 13 ? "th" : (["th", "st", "nd", "rd"][rank % 10] ?? "th");
  return `${formatCount(rank)}${ending}`;
}

function kcal(value: number): string {
  return withUnit(formatEnergy(value), "kcal/mol");
}
