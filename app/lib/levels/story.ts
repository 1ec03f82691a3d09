import { formatCount, formatEnergy, plural, withUnit } from "../format.ts";
import { shareWords } from "../workbench/findings.ts";
import type { LevelComparison } from "./compare.ts";
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
 * @param share that the window is to keep, fraction, and the window that does
 * @example "MMFF94 puts the lowest conformer of B3LYP, c4, 3rd, 0.80 kcal/mol up; ..."
 */
export function comparisonStory(input: {
  level: string;
  reference: string;
  nameOf: (place: number) => string;
  comparison: LevelComparison;
  meeting: LowestMeeting;
  window: { share: number; kcal: number; count: number };
}): Story {
  const { level, reference, nameOf, comparison, meeting, window } = input;
  const { n } = comparison;
  if (n === 1) {
    return {
      text: `Only one conformer has an energy at both ${level} and ${reference}, so there is nothing to compare.`,
      second: "Bring the energies of the other conformers to see how far the levels agree.",
    };
  }
  const lowest = nameOf(meeting.referenceLowest);
  const ownest = nameOf(meeting.levelLowest);
  const own = shareWords(comparison.referencePopulations[meeting.levelLowest] ?? 0);
  const first = meeting.same
    ? `${level} finds the lowest conformer of ${reference}, ${meeting.aboveAtLevel === 0 ? lowest : ownest}`
    : `${level} puts the lowest conformer of ${reference}, ${lowest}, ${ordinal(meeting.rankAtLevel)}, ` +
      `${kcal(meeting.aboveAtLevel)} up, and prefers ${ownest}, which holds ${own} at ${reference}`;
  const keep = `to keep ${shareWords(window.share)} of the ${reference} population`;
  const carry =
    window.count === n
      ? `${keep} takes all ${formatCount(n)} conformers, ${kcal(window.kcal)} of ${level}`
      : `${keep}, carry ${kcal(window.kcal)} of ${level}: ${formatCount(window.count)} of ${formatCount(n)} conformers`;
  return { text: `${first}; ${carry}.`, second: agreementWords(comparison) };
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
