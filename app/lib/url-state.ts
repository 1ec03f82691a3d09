import { readTyped } from "./format.ts";
import { STANDARD_TEMPERATURE_K } from "./units.ts";

/**
 * What is selected in the workbench, as it stands in the address: a link shows what its sender saw, and "back" undoes.
 * Absent means the default, so that short addresses stay short; what cannot be read is taken as absent, never as an error.
 */
export interface WorkbenchState {
  /** Id of the sift shown; null is the newest one. */
  sift: string | null;
  temperatureK: number;
  /** kcal/mol above the lowest; null is none. */
  windowKcal: number | null;
  /** Frame numbers in the order chosen; null is "not chosen", which the page reads as the lowest conformer. */
  selected: number[] | null;
  /** The two selected are shown alone, the second laid over the first; only where two are selected. */
  pair: boolean;
  /** Picked atoms, counted from 0 here and from 1 in the address; up to four, each once. */
  atoms: number[];
  /** Atoms that conformers are laid over each other on, from 0 here and from 1 in the address; null is all heavy atoms. */
  align: number[] | null;
  hydrogens: HydrogenMode;
  mode: ViewMode;
  weights: WeightsChoice;
  sort: SortState | null;
  compare: CompareState;
}

/** What the section on levels compares, and how. */
export interface CompareState {
  /** Level and reference, by id or name; null is the cheapest and the best by their names. */
  level: string | null;
  reference: string | null;
  zero: ZeroChoice;
  /** Frame of the zero "common"; null is the reference's lowest. */
  zeroFrame: number | null;
  /** The sift's conformers, or all accepted frames. */
  among: "conformers" | "accepted";
  /** Reference population that a window is to keep, fraction. */
  share: number;
  /** Error of the reference's energies, kcal/mol; 0 draws no band. */
  sigmaKcal: number;
}

export type ZeroChoice = "least-squares" | "own-minimum" | "common" | "median";

export type HydrogenMode = "none" | "polar" | "all";
export type ViewMode = "overlay" | "side" | "one";
export type WeightsChoice = "auto" | "copies" | "degeneracy";

/** Column of the conformer table that orders it. */
export interface SortState {
  column: string;
  descending: boolean;
}

export const DEFAULT_WINDOW_KCAL = 3;
export const TEMPERATURE_RANGE_K = [100, 1000] as const;
/** Longer selections would make addresses that mail programs break. */
export const MAX_SELECTED = 50;
export const MAX_PICKED = 4;
/** Three atoms that are not on one line fix a position; more than these make no better one. */
export const MAX_ALIGNED = 60;
const MAX_WINDOW_KCAL = 1000;
export const DEFAULT_SHARE = 0.95;
/** Our own starting value for the error of a reference level. */
export const DEFAULT_SIGMA_KCAL = 0.3;
export const MAX_SIGMA_KCAL = 20;
const VERSION = "1";

const ID = /^[a-z2-7]{16}$/;
const MAX_LEVEL_NAME = 120;
const NUMBER = /^\d{1,9}(\.\d{1,9})?$/;
const SORT = /^([a-z][a-z-]{0,30})\.(up|down)$/;
/** Names of the state in the address. Other parameters belong to somebody else and are kept. */
const KEYS = [
  ...["v", "sift", "T", "w", "sel", "pair", "at", "al", "h", "m", "weights", "sort"],
  ...["level", "ref", "zero", "zf", "of", "keep", "err"],
];

export function defaultState(): WorkbenchState {
  return {
    sift: null,
    temperatureK: STANDARD_TEMPERATURE_K,
    windowKcal: DEFAULT_WINDOW_KCAL,
    selected: null,
    pair: false,
    atoms: [],
    align: null,
    hydrogens: "polar",
    mode: "overlay",
    weights: "auto",
    sort: null,
    compare: {
      level: null,
      reference: null,
      zero: "least-squares",
      zeroFrame: null,
      among: "conformers",
      share: DEFAULT_SHARE,
      sigmaKcal: DEFAULT_SIGMA_KCAL,
    },
  };
}

/**
 * Reads the state from the parameters of an address.
 *
 * @returns every field, each at its default where the address says nothing or nonsense
 * @example readState(new URLSearchParams("T=310&sel=11,235")).temperatureK // 310
 */
export function readState(params: URLSearchParams): WorkbenchState {
  const start = defaultState();
  const sort = SORT.exec(params.get("sort") ?? "");
  const selected = params.has("sel") ? readCounts(params.get("sel"), MAX_SELECTED) : null;
  return {
    sift: ID.test(params.get("sift") ?? "") ? params.get("sift") : null,
    temperatureK:
      readNumber(params.get("T"), TEMPERATURE_RANGE_K[0], TEMPERATURE_RANGE_K[1], "K") ?? start.temperatureK,
    windowKcal:
      params.get("w") === "none"
        ? null
        : (readNumber(params.get("w"), 1e-6, MAX_WINDOW_KCAL, "kcal/mol") ?? start.windowKcal),
    selected,
    pair: selected?.length === 2 && params.get("pair") === "1",
    atoms: readCounts(params.get("at"), MAX_PICKED).map((atom) => atom - 1),
    align: readAtoms(params.get("al")),
    hydrogens: oneOf(params.get("h"), ["none", "polar", "all"], start.hydrogens),
    mode: oneOf(params.get("m"), ["overlay", "side", "one"], start.mode),
    weights: oneOf(params.get("weights"), ["auto", "copies", "degeneracy"], start.weights),
    sort: sort === null ? null : { column: sort[1]!, descending: sort[2] === "down" },
    compare: readCompare(params),
  };
}

function readCompare(params: URLSearchParams): CompareState {
  const start = defaultState().compare;
  // A link written by hand may say the name.
  const level = (key: string) => params.get(key)?.trim().slice(0, MAX_LEVEL_NAME) || null;
  const percent = readNumber(params.get("keep"), 0.01, 100);
  return {
    level: level("level"),
    reference: level("ref"),
    zero: oneOf(params.get("zero"), ["least-squares", "own-minimum", "common", "median"], start.zero),
    zeroFrame: readCounts(params.get("zf"), 1)[0] ?? null,
    among: oneOf(params.get("of"), ["conformers", "accepted"], start.among),
    share: percent === null ? start.share : Number((percent / 100).toFixed(11)),
    sigmaKcal: readNumber(params.get("err"), 0, MAX_SIGMA_KCAL) ?? start.sigmaKcal,
  };
}

function compareParts(compare: CompareState, start: CompareState): [string, string][] {
  const pairs: [string, string][] = [];
  if (compare.level !== null) pairs.push(["level", compare.level]);
  if (compare.reference !== null) pairs.push(["ref", compare.reference]);
  if (compare.zero !== start.zero) pairs.push(["zero", compare.zero]);
  if (compare.zeroFrame !== null) pairs.push(["zf", String(compare.zeroFrame)]);
  if (compare.among !== start.among) pairs.push(["of", compare.among]);
  if (compare.share !== start.share) pairs.push(["keep", writeNumber(100 * compare.share)]);
  if (compare.sigmaKcal !== start.sigmaKcal) pairs.push(["err", writeNumber(compare.sigmaKcal)]);
  return pairs;
}

/** A state with some of it changed. Two laid over each other are so as long as nothing else is selected. */
export function changeState(state: WorkbenchState, part: Partial<WorkbenchState>): WorkbenchState {
  return { ...state, ...(part.selected === undefined ? {} : { pair: false }), ...part };
}

/**
 * Writes a state into the parameters of an address; parameters of others are kept as they are.
 *
 * @returns new parameters; defaults are left out, and `v` stands only where something else does
 * @example writeState({ ...defaultState(), temperatureK: 310 }).toString() // "v=1&T=310"
 */
export function writeState(state: WorkbenchState, others?: URLSearchParams): URLSearchParams {
  const start = defaultState();
  const pairs: [string, string][] = [];
  if (state.sift !== null) pairs.push(["sift", state.sift]);
  if (state.temperatureK !== start.temperatureK) pairs.push(["T", writeNumber(state.temperatureK)]);
  if (state.windowKcal !== start.windowKcal)
    pairs.push(["w", state.windowKcal === null ? "none" : writeNumber(state.windowKcal)]);
  if (state.selected !== null) pairs.push(["sel", state.selected.slice(0, MAX_SELECTED).join(",")]);
  if (state.pair && state.selected?.length === 2) pairs.push(["pair", "1"]);
  if (state.atoms.length > 0)
    pairs.push([
      "at",
      state.atoms
        .slice(0, MAX_PICKED)
        .map((atom) => atom + 1)
        .join(","),
    ]);
  if (state.align !== null) pairs.push(["al", state.align.map((atom) => atom + 1).join(",")]);
  if (state.hydrogens !== start.hydrogens) pairs.push(["h", state.hydrogens]);
  if (state.mode !== start.mode) pairs.push(["m", state.mode]);
  if (state.weights !== start.weights) pairs.push(["weights", state.weights]);
  if (state.sort !== null)
    pairs.push(["sort", `${state.sort.column}.${state.sort.descending ? "down" : "up"}`]);
  pairs.push(...compareParts(state.compare, start.compare));
  const params = new URLSearchParams(pairs.length > 0 ? [["v", VERSION], ...pairs] : []);
  for (const [key, value] of others ?? []) {
    if (!KEYS.includes(key)) params.append(key, value);
  }
  return params;
}

/** The query of an address, with its question mark, or an empty string; commas stay readable. */
export function searchOf(params: URLSearchParams): string {
  const text = params.toString().replaceAll("%2C", ",");
  return text === "" ? "" : `?${text}`;
}

/** With `unit` as a person types it into a form, who may write a comma and the unit. */
function readNumber(text: string | null, least: number, most: number, unit?: string): number | null {
  if (text === null) return null;
  const typed = unit === undefined ? null : readTyped(text, unit);
  const plain = typed === null ? text : writeNumber(typed);
  if (!NUMBER.test(plain)) return null;
  const value = Number(plain);
  return value >= least && value <= most ? value : null;
}

/** Shortest decimal text that reads back to the same value within the nine places that are read. */
function writeNumber(value: number): string {
  return String(Number(value.toFixed(9)));
}

/** Counting numbers, each once, in order; what is none is passed over. */
function readCounts(text: string | null, most: number): number[] {
  const found = new Set<number>();
  for (const part of (text ?? "").split(",")) {
    if (found.size === most) break;
    if (/^[1-9]\d{0,7}$/.test(part)) found.add(Number(part));
  }
  return [...found];
}

/** Atoms to align on; fewer than three fix nothing and are taken as absent. */
function readAtoms(text: string | null): number[] | null {
  const atoms = readCounts(text, MAX_ALIGNED).map((atom) => atom - 1);
  return atoms.length >= 3 ? atoms : null;
}

function oneOf<T extends string>(text: string | null, choices: readonly T[], fallback: T): T {
  return choices.find((choice) => choice === text) ?? fallback;
}
