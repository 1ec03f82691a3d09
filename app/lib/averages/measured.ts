import { fixed, withUnit } from "../format.ts";
import type { MeasuredRecord } from "./averaging.ts";
import { type PastedValues, readLines } from "./pasted.ts";
import { type Agreement, againstMeasured, fitShieldings, type Line, shiftOf } from "./shielding-fit.ts";

/** Measured values and scaling of one per-atom quantity, as the ensemble keeps them or a draft in the address has them. */
export interface MeasuredState {
  quantity: string;
  /** What was said of the numbers; null leaves it to their name. */
  are: "shieldings" | "shifts" | null;
  /** By the first atom of a group, from 1. */
  values: ReadonlyMap<number, number>;
  /** Typed in, by atomic number; a nucleus that is absent is fitted. */
  scaling: ReadonlyMap<number, Omit<Line, "n">>;
  /** First atoms (from 1) of the pairs whose two values are exchanged. */
  swapped: ReadonlySet<number>;
  /** All atoms (from 1) that a value was measured for, by the first; a value without stands for its signal of today. */
  of?: ReadonlyMap<number, readonly number[]>;
  /** Values whose atoms are no signal now, because a group was taken apart or put together since. */
  aside?: readonly SetAside[];
}

/** A measured value with the atoms (from 1) that it was measured for. */
export interface SetAside {
  atoms: readonly number[];
  value: number;
}

/** Values, lines and swapped pairs of one quantity. */
export const MOST_MEASURED = 400;
const NUMBER = /^-?\d{1,6}(\.\d{1,6})?$/;

function numberOf(text: string | undefined): number | null {
  return text !== undefined && NUMBER.test(text) ? Number(text) : null;
}

/**
 * Reads what one parameter of an address says: "shielding~1:170.2~4:30.1~z6:-1.05:186.2~shieldings"; nonsense counts as absent.
 *
 * @example readMeasured("shift~1:77.3").values.get(1) // 77.3
 */
export function readMeasured(text: string): MeasuredState {
  const [quantity = "", ...parts] = text.split("~");
  const values = new Map<number, number>();
  const scaling = new Map<number, Omit<Line, "n">>();
  const swapped = new Set<number>();
  const aside: SetAside[] = [];
  let are: MeasuredState["are"] = null;
  for (const part of parts.slice(0, MOST_MEASURED)) {
    if (part === "shieldings" || part === "shifts") are = part;
    const [key = "", first, second] = part.split(":");
    const [a, b] = [numberOf(first), numberOf(second)];
    const z = /^z(\d{1,3})$/.exec(key)?.[1];
    const pair = /^s(\d{1,5})$/.exec(part)?.[1];
    const known = /^a(\d{1,5}(?:\.\d{1,5})*)$/.exec(key)?.[1];
    if (known !== undefined && a !== null) aside.push({ atoms: known.split(".").map(Number), value: a });
    if (pair !== undefined) swapped.add(Number(pair));
    if (z !== undefined && a !== null && a !== 0 && b !== null) {
      scaling.set(Number(z), { slope: a, intercept: b });
    } else if (/^\d{1,5}$/.test(key) && a !== null) values.set(Number(key), a);
  }
  const state = { quantity: decode(quantity), are, values, scaling, swapped };
  return aside.length === 0 ? state : { ...state, aside };
}

/** Writes it; the name of the quantity alone where nothing is measured or typed in. */
export function writeMeasured(state: MeasuredState): string {
  const { quantity, are, values, scaling, swapped, of, aside = [] } = state;
  const known = [...values].flatMap(([atom, value]) => {
    const atoms = of?.get(atom);
    return atoms === undefined ? [] : [{ atoms, value }];
  });
  return [
    encode(quantity),
    ...[...values]
      .filter(([atom]) => !of?.has(atom))
      .sort(([a], [b]) => a - b)
      .map(([atom, value]) => `${atom}:${plain(value)}`),
    ...[...known, ...aside].sort(byAtoms).map(({ atoms, value }) => `a${atoms.join(".")}:${plain(value)}`),
    ...[...scaling]
      .sort(([a], [b]) => a - b)
      .map(([z, { slope, intercept }]) => `z${z}:${plain(slope)}:${plain(intercept)}`),
    ...[...swapped].sort((a, b) => a - b).map((atom) => `s${atom}`),
    ...(are === null ? [] : [are]),
  ].join("~");
}

/** The parameter of an address that holds measured values, once a quantity. */
export const MEASURED_PARAM = "meas";

/** What nobody has said anything of. */
export function nothingMeasured(quantity: string): MeasuredState {
  return { quantity, are: null, values: new Map(), scaling: new Map(), swapped: new Set() };
}

/** The draft that an address holds of a quantity; null without one. */
export function measuredIn(params: URLSearchParams, quantity: string): MeasuredState | null {
  const drafts = params.getAll(MEASURED_PARAM).map(readMeasured);
  return drafts.find((state) => state.quantity === quantity) ?? null;
}

/** The parameters with this draft in the place of what they said of the quantity; none where it is what is kept. */
export function withMeasured(
  params: URLSearchParams,
  draft: MeasuredState,
  kept: MeasuredState,
): URLSearchParams {
  const next = new URLSearchParams(params);
  const others = params
    .getAll(MEASURED_PARAM)
    .filter((text) => readMeasured(text).quantity !== draft.quantity);
  next.delete(MEASURED_PARAM);
  for (const text of others) next.append(MEASURED_PARAM, text);
  const own = writeMeasured(draft);
  if (own !== writeMeasured(kept)) next.append(MEASURED_PARAM, own);
  return next;
}

const byAtoms = (a: SetAside, b: SetAside) =>
  (a.atoms[0] ?? 0) - (b.atoms[0] ?? 0) ||
  a.atoms.length - b.atoms.length ||
  (a.atoms[1] ?? 0) - (b.atoms[1] ?? 0);

/**
 * A state against the signals of today: a value whose atoms are one signal stands by it, one whose atoms are none is set
 * aside, and comes back when they are one again. A value that does not say its atoms is taken for the signal that begins
 * with its atom.
 *
 * @param groups atoms (from 1) of each signal, the first first
 * @example settle(stateOf10And15, [[10], [15]]).aside // [{ atoms: [10, 15], value: 80.08 }]
 */
export function settle(state: MeasuredState, groups: readonly (readonly number[])[]): MeasuredState {
  const firsts = new Map(groups.map((atoms) => [atoms[0] ?? 0, atoms]));
  const isSignal = (atoms: readonly number[]) => firsts.get(atoms[0] ?? 0)?.join() === atoms.join();
  const values = new Map<number, number>();
  const of = new Map<number, readonly number[]>();
  const known: SetAside[] = [...(state.aside ?? [])];
  for (const [atom, value] of state.values) {
    const own = state.of?.get(atom);
    const today = firsts.get(atom);
    if (own !== undefined) known.push({ atoms: own, value });
    else {
      values.set(atom, value);
      if (today !== undefined) of.set(atom, today);
    }
  }
  const aside: SetAside[] = [];
  for (const one of known) {
    const first = one.atoms[0] ?? 0;
    if (!isSignal(one.atoms)) aside.push(one);
    else {
      values.set(first, one.value);
      of.set(first, one.atoms);
    }
  }
  const { of: _of, aside: _aside, ...rest } = state;
  return {
    ...rest,
    values,
    ...(of.size === 0 ? {} : { of }),
    ...(aside.length === 0 ? {} : { aside: aside.sort(byAtoms) }),
  };
}

/**
 * Why values that were set aside take no part.
 *
 * @example asideWords([{ atoms: [10, 15], value: 80.08 }], (atom) => `C${atom}`, "ppm")
 * // "80.08 ppm was measured for C10 and C15 together: not compared."
 */
export function asideWords(
  aside: readonly SetAside[],
  nameOf: (atom: number) => string,
  unit: string | null,
): string {
  return aside
    .map(({ atoms, value }) => {
      const names = atoms.map(nameOf);
      const last = names.at(-1) ?? "";
      const who =
        names.length === 1 ? `${last} alone` : `${names.slice(0, -1).join(", ")} and ${last} together`;
      return `${withUnit(fixed(value, 2), unit ?? "")} was measured for ${who}: not compared.`;
    })
    .join(" ");
}

/** As it is kept with the ensemble; the same state always gives the same record. */
export function measuredRecord(state: MeasuredState): MeasuredRecord {
  const { quantity, are, values, scaling, swapped, of, aside } = state;
  return {
    quantity,
    are,
    values: [...values].sort(([a], [b]) => a - b),
    scaling: [...scaling]
      .sort(([a], [b]) => a - b)
      .map(([z, { slope, intercept }]) => ({ z, slope, intercept })),
    swapped: [...swapped].sort((a, b) => a - b),
    ...(of === undefined
      ? {}
      : {
          of: [...of]
            .filter(([atom]) => values.has(atom))
            .sort(([a], [b]) => a - b)
            .map(([atom, atoms]): [number, number[]] => [atom, [...atoms]]),
        }),
    ...(aside === undefined || aside.length === 0
      ? {}
      : { aside: aside.map(({ atoms, value }) => ({ atoms: [...atoms], value })) }),
  };
}

/** A record as it was kept. */
export function measuredState(record: MeasuredRecord): MeasuredState {
  const { quantity, are, values, scaling, swapped, of, aside } = record;
  return {
    quantity,
    are,
    values: new Map(values),
    scaling: new Map(scaling.map(({ z, slope, intercept }) => [z, { slope, intercept }])),
    swapped: new Set(swapped),
    ...(of === undefined ? {} : { of: new Map(of) }),
    ...(aside === undefined ? {} : { aside }),
  };
}

/** True where nothing is said: such a record is not kept. */
export function saysNothing({
  values,
  scaling,
  aside = [],
}: Pick<MeasuredRecord, "values" | "scaling" | "aside">): boolean {
  return values.length === 0 && scaling.length === 0 && aside.length === 0;
}

/** Whether the name of a quantity speaks of shieldings. */
const saysShielding = (quantity: string) => /shield|sigma|σ/i.test(quantity);

/** Whether computed numbers are shieldings, to be scaled to shifts: as somebody said, else as their name says. */
export function areShieldings(
  { quantity, are }: Pick<MeasuredState, "quantity" | "are">,
  unit: string | null,
): boolean {
  return unit === "ppm" && (are ?? (saysShielding(quantity) ? "shieldings" : "shifts")) === "shieldings";
}

const plain = (value: number) => String(Number(value.toFixed(6)));
const encode = (name: string) => name.replaceAll("%", "%25").replaceAll("~", "%7E");
const decode = (name: string) => name.replaceAll("%7E", "~").replaceAll("%25", "%");

/**
 * Measured values out of pasted lines: an atom ("C4", "4") or several of a group, then the value.
 *
 * @param groups first atom (from 1) of the group of each atom
 * @param commas true where somebody said that commas are decimal ones
 * @returns values by the first atom of their group, and the lines that say no such thing
 * @example readPasted("C1 77.3\nC4\t20.1", groups).values // { 1 => 77.3, 4 => 20.1 }
 */
export function readPasted(
  text: string,
  groups: ReadonlyMap<number, number>,
  commas = false,
): PastedValues<number> {
  return readLines(
    text,
    (line) => {
      // A comma between digits may be a decimal one: it separates nothing.
      const parts = line.split(/[\s;=:]+/).flatMap((part) => part.replace(/,$/, "") || []);
      const atom = Number(/^[A-Za-z]{0,2}_?(\d{1,5})$/.exec(parts[0] ?? "")?.[1] ?? Number.NaN);
      return { key: groups.get(atom) ?? null, number: parts.length < 2 ? undefined : parts.at(-1) };
    },
    numberOf,
    commas,
  );
}

/** A group of equivalent atoms with its average, and what was measured. */
export interface MeasuredGroup {
  /** First atom, from 1. */
  atom: number;
  /** Atomic number. */
  z: number;
  average: number | null;
  /** Standard deviation that the error of the level makes of the average; null where it is not known. */
  error: number | null;
  measured: number | null;
}

/** One group beside its measured value, both of one kind. */
export interface SetBeside extends MeasuredGroup {
  /** The average, or the shift that its shielding scales to. */
  computed: number | null;
  computedError: number | null;
  difference: number | null;
}

export interface Nucleus {
  z: number;
  groups: SetBeside[];
  /** Of shieldings: the line in use; null where there is none yet. */
  line: (Line & { from: "fitted" | "typed" }) | null;
  agreement: Agreement | null;
  /** Atom (first of its group, from 1) with the largest deviation. */
  farthest: number | null;
}

/**
 * Averages beside measured values, nucleus by nucleus; shieldings are scaled to shifts by the line typed in, else by the
 * one fitted to the measured values themselves.
 *
 * @param shieldings true where the averages are shieldings and the measured values shifts
 * @example setBeside(groups, { shieldings: true, scaling: new Map() })[0]?.line?.slope // -1.02
 */
export function setBeside(
  groups: readonly MeasuredGroup[],
  options: { shieldings: boolean; scaling: ReadonlyMap<number, Omit<Line, "n">> },
): Nucleus[] {
  const nuclei = [...new Set(groups.map(({ z }) => z))].sort((a, b) => a - b);
  return nuclei.map((z) => {
    const own = groups.filter((group) => group.z === z);
    const known = own.flatMap(({ average, measured }) =>
      average === null || measured === null ? [] : [{ average, measured }],
    );
    const line = options.shieldings ? lineOf(known, options.scaling.get(z)) : null;
    const beside = own.map((group): SetBeside => {
      const { average, error, measured } = group;
      const open = average === null || (options.shieldings && line === null);
      const computed = open ? null : line === null ? average : shiftOf(average, line);
      return {
        ...group,
        computed,
        computedError: computed === null || error === null ? null : error / Math.abs(line?.slope ?? 1),
        difference: computed === null || measured === null ? null : computed - measured,
      };
    });
    const pairs = beside.flatMap(({ atom, computed, measured }) =>
      computed === null || measured === null ? [] : [{ atom, computed, measured }],
    );
    const agreement = againstMeasured(
      pairs.map(({ computed }) => computed),
      pairs.map(({ measured }) => measured),
    );
    return { z, groups: beside, line, agreement, farthest: pairs[agreement?.maxPlace ?? -1]?.atom ?? null };
  });
}

/** Slopes of computed against measured values that speak of shieldings: our own starting values around -1. */
const SHIELDING_SLOPE = { low: -1.3, high: -0.7 } as const;

/**
 * Nuclei whose computed values, taken for shifts, fall as the measured shifts rise: most likely they are shieldings.
 *
 * @returns the slope a nucleus; none where fewer than three values are measured
 * @example shieldingLike(nuclei) // [{ z: 6, slope: -1.02 }]
 */
export function shieldingLike(nuclei: readonly Nucleus[]): { z: number; slope: number }[] {
  return nuclei.flatMap(({ z, groups }) => {
    const known = groups.flatMap(({ average, measured }) =>
      average === null || measured === null ? [] : [{ average, measured }],
    );
    const line = fitShieldings(
      known.map(({ average }) => average),
      known.map(({ measured }) => measured),
    );
    const { low, high } = SHIELDING_SLOPE;
    return line !== null && line.slope >= low && line.slope <= high ? [{ z, slope: line.slope }] : [];
  });
}

function lineOf(
  known: readonly { average: number; measured: number }[],
  typed: Omit<Line, "n"> | undefined,
): Nucleus["line"] {
  if (typed !== undefined) return { ...typed, n: 0, from: "typed" };
  const fitted = fitShieldings(
    known.map(({ average }) => average),
    known.map(({ measured }) => measured),
  );
  return fitted === null || fitted.slope === 0 ? null : { ...fitted, from: "fitted" };
}
