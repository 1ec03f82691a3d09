/** The order in which a sift walks over the frames, and those it leaves out. */

export interface SiftEnergies {
  /** In their own unit as written, one a frame of the block. */
  readonly values: Float64Array;
  /** 0 where a frame has no energy. */
  readonly present: Uint8Array;
  readonly kcalPerUnit: number;
}

export interface Walk {
  /** Rows of the block in the order of the walk. */
  readonly rows: Int32Array;
  /** kcal/mol above the lowest accepted frame, in the order of `rows`; null without energies. */
  readonly relative: Float64Array | null;
  /** Rows above the window and rows without energy, ascending. */
  readonly outside: Int32Array;
  readonly withoutEnergy: Int32Array;
}

/**
 * Sorts rows by (energy, frame number) and cuts at the window; without energies by frame number. Energies are
 * subtracted in their own unit and the difference converted once; "within" is <=, without slack.
 *
 * @param window kcal/mol above the lowest, or null
 * @throws RangeError on an energy that is present but not finite, or a factor not above zero
 * @example planWalk(Int32Array.of(1, 2), null, null).rows // 0, 1
 */
export function planWalk(numbers: Int32Array, energies: SiftEnergies | null, window: number | null): Walk {
  const every = Array.from({ length: numbers.length }, (_, row) => row);
  const byNumber = (a: number, b: number) => numbers[a]! - numbers[b]!;
  if (!energies) {
    const none = new Int32Array(0);
    const rows = Int32Array.from(every.sort(byNumber));
    return { rows, relative: null, outside: none, withoutEnergy: none };
  }
  const { values, present, kcalPerUnit } = energies;
  if (!(kcalPerUnit > 0)) throw new RangeError(`No unit has ${kcalPerUnit} kcal/mol.`);
  const known = every.filter((row) => present[row] === 1);
  for (const row of known) {
    if (!Number.isFinite(values[row]!)) {
      throw new RangeError(`The energy of frame ${numbers[row]} is not a finite number.`);
    }
  }
  known.sort((a, b) => values[a]! - values[b]! || byNumber(a, b));
  const lowest = known.length > 0 ? values[known[0]!]! : 0;
  const above = (row: number) => (values[row]! - lowest) * kcalPerUnit;
  const inside = window === null ? known : known.filter((row) => above(row) <= window);
  const outside = known.slice(inside.length).sort(byNumber);
  return {
    rows: Int32Array.from(inside),
    relative: Float64Array.from(inside, above),
    outside: Int32Array.from(outside),
    withoutEnergy: Int32Array.from(every.filter((row) => present[row] !== 1).sort(byNumber)),
  };
}
