import {
  capital,
  countWord,
  fixed,
  formatCount,
  formatEnergy,
  formatPercent,
  formatRmsd,
  formatSeconds,
  formatTemperature,
  plural,
  pluralWord,
  withUnit,
} from "../format.ts";
import { WIDE_KCAL } from "../intake/energy-remarks.ts";
import { isEnsembleAsk } from "../intake/reading-choices.ts";
import { readAskId } from "../intake/reading-questions.ts";
import type { IntakeMessage, IntakeQuestion } from "../intake/report.ts";
import { spreadWarning } from "../intake/whole-spread.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { SiftResult } from "../recipe/result.ts";
import { thermalEnergyKcal } from "../units.ts";
import type { EnsembleView, IntakeView, LevelView } from "../views.ts";
import { byPopulation, type ConformerRow, type FrameRole, type Outside } from "./conformers.ts";
import { framesWords } from "./intake-lists.ts";

/** What a section says first: the finding, and a second line that backs it. Plain text, computed. */
export interface Finding {
  text: string;
  second: string | null;
}

/** From this share on a shape counts as one that carries the ensemble. */
const CARRIES = 0.05;

/** Shares that pages list beside the finding: a rounded figure must not claim one that is not reached. */
const LISTED = [0.5, 0.9, 0.95, 0.99];

/** Rounded to so many decimals a share would claim a listed one that it does not reach. */
const claims = (fraction: number, digits: number) =>
  LISTED.some(
    (share) => fraction < share - 1e-12 && Number(fixed(100 * fraction, digits)) >= 100 * share - 1e-9,
  );

/** Whole per cent would claim a listed share, or disagree with the one decimal of the table beside it. */
function needsDecimal(fraction: number): boolean {
  const whole = Number(fixed(100 * fraction, 0));
  return claims(fraction, 0) || Math.round(Number(fixed(100 * fraction, 1))) !== whole;
}

/** One decimal, rounded down where rounding would claim a listed share. */
const withDecimal = (fraction: number) =>
  formatPercent(claims(fraction, 1) ? Math.floor(1000 * fraction) / 1000 : fraction, 1);

/**
 * A population in the finding: whole per cent, one decimal below 1 % and where whole per cent would claim a half, 90, 95
 * or 99 % that is not reached or disagree with a table, and never "100 %" of what is not all.
 *
 * @example shareWords(0.69295) // "69 %"; shareWords(0.0051) // "0.5 %"; shareWords(0.997) // "more than 99 %"
 * @example shareWords(0.949) // "94.9 %"; shareWords(0.5346) // "53.5 %"
 */
export function shareWords(fraction: number): string {
  if (fraction >= 1 - 1e-12) return formatPercent(1);
  if (fraction >= 0.995) return `more than ${formatPercent(0.99)}`;
  if (fraction >= 0.0095) return needsDecimal(fraction) ? withDecimal(fraction) : formatPercent(fraction);
  return fraction > 0 ? shareFigure(fraction) : formatPercent(0);
}

/**
 * Shares of one sentence, all with as many decimals: with one where one of them needs it.
 *
 * @example sharesWords([0.949, 0.53]) // ["94.9 %", "53.0 %"]
 */
export function sharesWords(fractions: readonly number[]): string[] {
  const plain = (fraction: number) => fraction < 0.0095 || fraction >= 0.995;
  const decimal = fractions.some((fraction) => !plain(fraction) && needsDecimal(fraction));
  return fractions.map((fraction) =>
    decimal && !plain(fraction) ? withDecimal(fraction) : shareWords(fraction),
  );
}

/**
 * A population in small print and in figures: one decimal as in the tables, and never all or nothing of what is neither.
 *
 * @example shareFigure(0.0305) // "3.1 %"; shareFigure(0.0002) // "below 0.1 %"; shareFigure(0.9997) // "more than 99.9 %"
 */
export function shareFigure(fraction: number): string {
  if (fraction >= 1 - 1e-12) return formatPercent(1, 1);
  if (fraction >= 0.9995) return `more than ${formatPercent(0.999, 1)}`;
  if (fraction >= 0.0005) return formatPercent(fraction, 1);
  return fraction > 0 ? `below ${formatPercent(0.001, 1)}` : formatPercent(0, 1);
}

/** Which shapes carry the ensemble at this temperature. */
export function populationsFinding(rows: readonly ConformerRow[], temperatureK: number): Finding {
  const at = `at ${withUnit(formatTemperature(temperatureK), "K")}`;
  const ranked = byPopulation(rows);
  const first = ranked[0];
  if (!first) return { text: "There is no conformer to weigh.", second: null };
  if (first.population === null) {
    return {
      text: "These frames carry no energies, so no population can be given.",
      second: "The distinct set stands in file order. Give a file with energies to weigh its conformers.",
    };
  }
  if (ranked.length === 1) {
    return { text: `One shape is all there is: ${first.name} holds the whole ensemble ${at}.`, second: null };
  }
  const carrying = ranked.filter((row) => (row.population ?? 0) >= CARRIES);
  const sum = (some: readonly ConformerRow[]) =>
    some.reduce((total, row) => total + (row.population ?? 0), 0);
  if (carrying.length === ranked.length && ranked.length <= 4) {
    const shares = sharesWords(ranked.map((row) => row.population ?? 0));
    const each = ranked.map((row, k) => `${row.name} ${shares[k]}`);
    return {
      text: `${capital(countWord(ranked.length))} shapes share the whole ensemble ${at}: ${joinWords(each)}.`,
      second: null,
    };
  }
  if (sum(carrying) < 0.5) {
    const half = countToShare(ranked, 0.5);
    return {
      text:
        `It takes ${countWord(half)} shapes to hold half of the ensemble ${at}: ` +
        `the most populated, ${first.name}, has ${shareWords(first.population)}.`,
      second: null,
    };
  }
  if (carrying.length === 1) {
    const next = ranked[1];
    return {
      text: `${first.name} alone carries ${shareWords(first.population)} of the ensemble ${at}.`,
      second: next ? `Next comes ${next.name} with ${shareWords(next.population ?? 0)}.` : null,
    };
  }
  const [together, alone] = sharesWords([sum(carrying), first.population]);
  return {
    text:
      `${capital(countWord(carrying.length))} shapes carry ${together} of the ensemble ${at}, ` +
      `${first.name} alone ${alone}.`,
    second: null,
  };
}

/** How many of the most populated it takes to reach a share. */
function countToShare(ranked: readonly ConformerRow[], share: number): number {
  let held = 0;
  let count = 0;
  for (const row of ranked) {
    held += row.population ?? 0;
    count += 1;
    if (held >= share - 1e-12) break;
  }
  return count;
}

/** What lies above the window that the reader set, and what the sift's own window may have cut off. */
export function windowFinding(
  rows: readonly ConformerRow[],
  outside: Outside,
  windowKcal: number | null,
  temperatureK: number,
  recipe: SiftRecipe,
  framesCut: number,
): string[] {
  const lines: string[] = [];
  if (windowKcal !== null && rows.some((row) => row.relativeEnergy !== null)) {
    const window = withUnit(formatEnergy(windowKcal), "kcal/mol");
    lines.push(
      outside.count === 0
        ? `Nothing lies above the window of ${window}.`
        : `${capital(pluralWord(outside.count, "conformer"))} above the window of ${window} ` +
            `${outside.count === 1 ? "holds" : "hold"} ${shareFigure(outside.share)}.`,
    );
  }
  if (recipe.window !== null) {
    // Methods page, section 7: a copy cut by the window w has at most exp(-w/RT) of the minimum's weight.
    const bound = Math.exp(-recipe.window / thermalEnergyKcal(temperatureK));
    lines.push(
      `The sift left out ${plural(framesCut, "frame")} above ${withUnit(formatEnergy(recipe.window), "kcal/mol")}; ` +
        `each copy missing there would weigh at most ${shareFigure(bound)} of the lowest conformer.`,
    );
  }
  return lines;
}

/** How many shapes the accepted frames repeat, and what it took to say so. */
export function distinctFinding(result: SiftResult): Finding {
  const kept = result.kept.length;
  const compared = kept + result.dropped.length;
  const left = leftOut(result);
  if (compared === 0) {
    return { text: "No accepted frame takes part in this sift.", second: left };
  }
  const text =
    result.dropped.length === 0
      ? compared === 1
        ? "One frame was accepted, so there is one shape."
        : `All ${formatCount(compared)} frames differ from each other: none repeats another.`
      : `${plural(compared, "accepted frame")} repeat ${kept === 1 ? "one shape" : plural(kept, "shape")}.`;
  const explained =
    result.dropped.length === 0
      ? ""
      : `${plural(result.dropped.length, "frame was", "frames were")} left out as ` +
        `${result.dropped.length === 1 ? "a repeat; it names whom it repeats" : "repeats; each names whom it repeats"}. `;
  const work = `${plural(result.pairsExamined, "pair")} had to be compared, in ${formatSeconds(result.seconds)}.`;
  return { text, second: [`${explained}${work}`, left].filter(Boolean).join(" ") };
}

/** Frames that no comparison saw, counted; null where there are none. */
function leftOut(result: SiftResult): string | null {
  const parts: string[] = [];
  if (result.outsideWindow.length > 0)
    parts.push(`${plural(result.outsideWindow.length, "frame lies", "frames lie")} above the window`);
  if (result.withoutEnergy.length > 0)
    parts.push(`${plural(result.withoutEnergy.length, "frame has", "frames have")} no energy at this level`);
  if (result.held.length > 0) parts.push(`${plural(result.held.length, "frame is", "frames are")} held`);
  return parts.length === 0 ? null : `${capital(joinWords(parts))}.`;
}

/** Kept conformers whose own mirror image lies near the tolerance, where the choice of it decides on the factor 2. */
export function nearMirror(
  result: Pick<SiftResult, "kept">,
  recipe: SiftRecipe,
): { frame: number; name: string; rmsd: number }[] {
  if (recipe.mirror !== "merge") return [];
  const found: { frame: number; name: string; rmsd: number }[] = [];
  for (const [index, { frame, mirrorRmsd }] of result.kept.entries()) {
    if (mirrorRmsd > recipe.rmsdTolerance / 2 && mirrorRmsd < 2 * recipe.rmsdTolerance)
      found.push({ frame, name: `c${index + 1}`, rmsd: mirrorRmsd });
  }
  return found;
}

/**
 * Whether answers may bring further questions: the unit is asked once the number is known, and both once the files could
 * be read.
 */
export function moreMayFollow(questions: readonly IntakeQuestion[]): boolean {
  const open = questions.filter(({ answered }) => answered === undefined);
  const unitAsked = questions.some(({ code }) => code === "energy-unit");
  return open.some(({ id, code }) => {
    const asked = readAskId(id);
    // The configuration comes last: it opens nothing further.
    return (asked !== null && asked.ask !== "configuration") || (code === "energy-from" && !unitAsked);
  });
}

/**
 * Energies that span more, or less, than those of conformers do, or lie far off the others, as intake says it of the
 * files, of further batches and of single frames; null where they do not, or where the frames that do are held.
 *
 * @param strip state of every frame, as `IntakeView` has it
 */
export function spreadRemark(messages: readonly IntakeMessage[], strip: string): string | null {
  const said = messages.filter(({ code }) => code === "E12");
  // The line that counts what is not listed has no hint.
  const whole = said.filter(({ frame, hint }) => frame === undefined && hint !== undefined);
  const unlisted = said.some(({ frame, hint }) => frame === undefined && hint === undefined);
  const single = said.filter(({ frame }) => frame !== undefined && strip[frame - 1] !== "h");
  const words = [
    ...new Set(whole.map(({ message, hint }) => `${message} ${hint}`)),
    farOffFrames(single, unlisted),
  ].filter((sentence) => sentence !== null);
  return words.length === 0 ? null : words.join(" ");
}

/** Frames whose energy lies far off, in a sentence; `unlisted` where there are more of them. */
function farOffFrames(found: readonly IntakeMessage[], unlisted: boolean): string | null {
  const [first, second] = found;
  if (first?.frame === undefined) return null;
  if (second === undefined && !unlisted) {
    const message = first.message.charAt(0).toLowerCase() + first.message.slice(1);
    return [`In frame ${formatCount(first.frame)} ${message}`, first.hint].filter(Boolean).join(" ");
  }
  const numbers = found.flatMap(({ frame }) => (frame === undefined ? [] : [frame]));
  const frames = framesWords([...new Set(numbers)]).toLowerCase();
  return (
    `The energies of ${frames}${unlisted ? " and of others" : ""} lie more than ${WIDE_KCAL} kcal/mol from those of the rest. ` +
    "Another unit or zero of energy, or calculations that failed? Hold the frames if so."
  );
}

/** The same of the conformers of a set, whose populations rest on these energies; null where nothing is odd. */
export function spreadCaution(rows: readonly ConformerRow[], level: LevelView | null): string | null {
  if (level === null) return null;
  const energies = rows.flatMap(({ relativeEnergy }) => (relativeEnergy === null ? [] : [relativeEnergy]));
  const words = energies.length < 2 ? null : spreadWarning(level.name, "kcal/mol", energies);
  return words === null ? null : `${words} They were read in ${level.unit}.`;
}

/**
 * Whether what is held beside the frames that wait is held for reasons of its own: where it is open which molecule or
 * configuration the ensemble is, that question may be about these.
 */
export function heldForOther({ waiting, questions }: Pick<IntakeView, "waiting" | "questions">): boolean {
  const chooses = questions.some(
    ({ id, answered }) => answered === undefined && isEnsembleAsk(readAskId(id)?.ask),
  );
  return waiting > 0 && !chooses;
}

/**
 * What intake says first.
 *
 * @param intake frames held for nothing but an open question, the questions, and what was said of the files
 */
export function intakeFinding(
  ensemble: EnsembleView,
  intake: Pick<IntakeView, "waiting" | "questions" | "messages" | "strip">,
): Finding {
  const { frames, accepted, remarked, held, openQuestions } = ensemble;
  const { waiting } = intake;
  const read = `${plural(frames, "frame")} read:`;
  if (openQuestions > 0) {
    const one = openQuestions === 1;
    const first = one ? "One question comes" : `${capital(countWord(openQuestions))} questions come`;
    // The count is that of every other place; what answers may bring is not counted before it is there.
    const more = moreMayFollow(intake.questions) ? ", and an answer may bring another" : "";
    const other = held - waiting;
    const parts = [
      waiting > 0 ? `${formatCount(waiting)} can be accepted` : null,
      accepted > 0 ? `${formatCount(accepted)} ${accepted === 1 ? "is" : "are"} accepted already` : null,
      other > 0
        ? `${formatCount(other)} ${other === 1 ? "is" : "are"} held${heldForOther(intake) ? " for other reasons" : ""}`
        : null,
    ].filter((part) => part !== null);
    if (accepted > 0) {
      const open = one ? "One question is" : `${capital(countWord(openQuestions))} questions are`;
      return {
        text: `${read} ${joinWords(parts)}. ${open} open; what is accepted is used meanwhile.`,
        second: null,
      };
    }
    return {
      text: `${read} ${joinWords(parts)}. ${first} first${more}; nothing is computed before ${one && more === "" ? "it is" : "they are"} answered.`,
      second: null,
    };
  }
  const { also, todo } = energiesFinding(ensemble, intake);
  if (held === 0) {
    const remark = remarked === 0 ? "" : `, ${formatCount(remarked)} of them with a remark`;
    return {
      text: `${read} ${frames === 1 ? "it is accepted" : "all are accepted"}${remark}.${also}`,
      second: todo,
    };
  }
  const remark = remarked === 0 ? "" : `, ${formatCount(remarked)} of them with a remark,`;
  const kept = "A held frame is kept and left out of every computation; the list says which can be released.";
  return {
    text: `${read} ${formatCount(accepted)} ${accepted === 1 ? "is" : "are"} accepted${remark} and ${formatCount(held)} ${held === 1 ? "is" : "are"} held.${also}`,
    second: [todo, kept].filter(Boolean).join(" "),
  };
}

/** What is to be known of the energies before anything else, and what to do about it. */
function energiesFinding(
  ensemble: EnsembleView,
  { messages, strip }: Pick<IntakeView, "messages" | "strip">,
): { also: string; todo: string | null } {
  if (ensemble.accepted > 0 && ensemble.levels.every(({ count }) => count === 0)) {
    return {
      also: " None has an energy, so there are no populations.",
      todo: "Give the energies as a table or a second structure file, or read the files again and name the number that is the energy.",
    };
  }
  const odd = spreadRemark(messages, strip);
  return odd === null ? { also: "", todo: null } : { also: ` ${odd}`, todo: null };
}

/** The pair of figures between which a tolerance can move without changing anything that was merged. */
export function farthestMerged(result: SiftResult): { frame: number; repeats: number; rmsd: number } | null {
  let farthest: { frame: number; repeats: number; rmsd: number } | null = null;
  for (const { frame, repeats, rmsd } of result.dropped) {
    if (farthest === null || rmsd > farthest.rmsd) farthest = { frame, repeats, rmsd };
  }
  return farthest;
}

/** What became of one frame, as a sentence. */
export function frameSentence(frame: number, role: FrameRole | undefined): string {
  if (!role) return `There is no frame ${formatCount(frame)} in this sift.`;
  switch (role.kind) {
    case "kept":
      return `Frame ${frame} is ${role.name} itself.`;
    case "repeat": {
      const rmsd = `${role.upperBound ? "at most " : ""}${withUnit(formatRmsd(role.rmsd), "Å")}`;
      const energy =
        role.energyDifference === null
          ? ""
          : `, ${withUnit(formatEnergy(role.energyDifference), "kcal/mol")} above it`;
      return `Frame ${frame} repeats ${role.name} (frame ${role.repeats})${role.mirror ? " as its mirror image" : ""}: RMSD ${rmsd}${energy}.`;
    }
    case "held":
      return `Frame ${frame} is held and takes no part.`;
    case "outside-window":
      return `Frame ${frame} lies above the window of this sift and was not compared.`;
    case "without-energy":
      return `Frame ${frame} has no energy at this level and was not compared.`;
  }
}

/** "a", "a and b", "a, b and c". */
export function joinWords(parts: readonly string[]): string {
  if (parts.length <= 1) return parts[0] ?? "";
  return `${parts.slice(0, -1).join(", ")} and ${parts.at(-1)}`;
}

/** RT at the temperature, as the charts label it. */
export function thermalLabel(temperatureK: number): string {
  return `RT = ${fixed(thermalEnergyKcal(temperatureK), 2)}`;
}
