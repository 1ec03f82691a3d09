import { type EnergyUnit, kcalPer } from "../units.ts";
import { farOff, kcalWords, NARROW_KCAL, WIDE_KCAL } from "./energy-remarks.ts";

/** All energies of a level, of frames that take part, in the order of their frames. */
export interface LevelEnergies {
  readonly name: string;
  readonly unit: EnergyUnit;
  readonly frames: readonly number[];
  readonly values: readonly number[];
}

/** A finding on a level as a whole; with `frame` on that one. */
export interface SpreadFinding {
  frame?: number;
  message: string;
  hint: string;
}

const LOOK_AGAIN =
  "Another unit or another zero of energy? Read the files again with the right one, give the batch a level of its own, or hold its frames: until then populations rest on the lowest energies alone.";

/**
 * What a further batch does to the spread of a level (row E12): frames that it puts far off, or a whole that became wider
 * or narrower than conformers of one molecule are. What either part showed by itself has been said of it.
 *
 * @param first number of the first frame of the batch
 * @example batchSpread({ name: "A", unit: "kcal/mol", frames: [1, 2, 3], values: [8, 9, -174133] }, 3)[0]?.message
 */
export function batchSpread(level: LevelEnergies, first: number): SpreadFinding[] {
  const { frames, values, unit, name } = level;
  const before = rangeOf(values.filter((_, k) => frames[k]! < first));
  const batch = rangeOf(values.filter((_, k) => frames[k]! >= first));
  if (before === null || batch === null) return [];
  const low = Math.min(before.low, batch.low);
  const factor = kcalPer(unit);
  const kcal = (Math.max(before.high, batch.high) - low) * factor;
  const lone = before.count === 1 || batch.count === 1;
  if (kcal < NARROW_KCAL) return lone ? [narrow(level, kcal)] : [];
  const beforeKcal = (before.high - before.low) * factor;
  if (kcal <= WIDE_KCAL || (beforeKcal > WIDE_KCAL && kcal - beforeKcal <= WIDE_KCAL)) return [];
  const off = farOff(values, unit);
  if (off.length > 0) return off.map((k) => apart(level, k));
  const gap = Math.max(batch.low - before.high, before.low - batch.high) * factor;
  const words = frameWords(frames.filter((frame) => frame >= first));
  const message =
    gap > WIDE_KCAL
      ? `The energies of this batch (${words}) lie ${kcalWords(gap)} ${batch.low > before.low ? "above" : "below"} those that “${name}” had. No conformers of one molecule at one level do.`
      : `With this batch (${words}) the energies of “${name}” span ${kcalWords(kcal)}, more than conformers of one molecule do.`;
  return [{ message, hint: LOOK_AGAIN }];
}

function narrow({ name, values }: LevelEnergies, kcal: number): SpreadFinding {
  const hint = "Is this the number that changes between conformers, and is its unit right?";
  if (kcal === 0) return { message: `All ${values.length} energies of “${name}” are equal.`, hint };
  const message = `All energies of “${name}” lie within ${NARROW_KCAL} kcal/mol, closer than conformers of one molecule do.`;
  return { message, hint };
}

function apart({ frames, values, unit, name }: LevelEnergies, k: number): SpreadFinding {
  const middle = Float64Array.from(values).sort()[values.length >> 1]!;
  const away = kcalWords(Math.abs(values[k]! - middle) * kcalPer(unit));
  return {
    frame: frames[k]!,
    message: `The energy lies ${away} from the middle of all others of “${name}”.`,
    hint: "Another unit or zero of energy, or a calculation that failed? Hold the frame if so.",
  };
}

function frameWords(frames: readonly number[]): string {
  const [first, last] = [frames[0], frames[frames.length - 1]];
  return first === last ? `frame ${first}` : `frames ${first} to ${last}`;
}

function rangeOf(values: readonly number[]): { low: number; high: number; count: number } | null {
  if (values.length === 0) return null;
  let [low, high] = [values[0]!, values[0]!];
  for (const value of values) {
    if (value < low) low = value;
    if (value > high) high = value;
  }
  return { low, high, count: values.length };
}

/**
 * What is to be known of populations and sifts at a level whose energies lie farther apart, or nearer together, than
 * those of one molecule's conformers; null where nothing is.
 *
 * @param values of all frames that take part
 * @example spreadWarning("A", "kcal/mol", [8.1, -174133]) // "The energies of “A” span 174,141 kcal/mol ..."
 */
export function spreadWarning(name: string, unit: EnergyUnit, values: readonly number[]): string | null {
  const range = rangeOf(values);
  if (range === null || range.count < 2) return null;
  const kcal = (range.high - range.low) * kcalPer(unit);
  if (kcal > WIDE_KCAL) {
    return `The energies of “${name}” span ${kcalWords(kcal)}, more than conformers of one molecule do: populations rest on the lowest of them. Look for another unit, another zero of energy or a failed calculation.`;
  }
  if (kcal >= NARROW_KCAL) return null;
  const found = kcal === 0 ? "are all equal" : `lie within ${NARROW_KCAL} kcal/mol`;
  return `The energies of “${name}” ${found}, which conformers of one molecule rarely do. Is the unit right?`;
}
