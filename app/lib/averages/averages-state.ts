import { TEMPERATURE_RANGE_K } from "../url-state.ts";

/**
 * What the sections on averages and trust add to the address, beside the state of the workbench: temperatures shown
 * beside each other, the error of the level, the property looked at.
 */
export interface AveragesState {
  /** K, rising; at most six. */
  temperatures: number[];
  /** kcal/mol, one standard deviation; null where taken from a comparison. */
  sigmaKcal: number | null;
  /** Id of the level that the error is taken against; null where typed in. */
  sigmaFrom: string | null;
  /** Id of the level whose energies weigh the set; null is that of the sift. */
  by: string | null;
  /** Id of the property looked at; null is the most telling one. */
  property: string | null;
  /** Å within which similar shapes share errors; null where errors are independent. */
  sharedWithin: number | null;
}

/** Our own starting values: a little below, at and above room temperature, and an error that is common for good levels. */
export const DEFAULT_TEMPERATURES = [253, 298.15, 323];
export const DEFAULT_ERROR_KCAL = 0.5;
export const MAX_TEMPERATURES = 6;
export const MAX_ERROR_KCAL = 20;
export const SHARED_WITHIN_A = 1;

const ID = /^[a-z2-7]{16}$/;
const NUMBER = /^\d{1,6}(\.\d{1,6})?$/;

export function defaultAveragesState(): AveragesState {
  return {
    temperatures: [...DEFAULT_TEMPERATURES],
    sigmaKcal: DEFAULT_ERROR_KCAL,
    sigmaFrom: null,
    by: null,
    property: null,
    sharedWithin: null,
  };
}

/**
 * Reads the state from the parameters of an address; nonsense counts as absent.
 *
 * @example readAveragesState(new URLSearchParams("Ts=250,300")).temperatures // [250, 300]
 */
export function readAveragesState(params: URLSearchParams): AveragesState {
  const start = defaultAveragesState();
  const id = (key: string) => (ID.test(params.get(key) ?? "") ? params.get(key) : null);
  const sigmaFrom = id("sigref");
  const sigma = number(params.get("sig"), 0, MAX_ERROR_KCAL);
  return {
    temperatures: params.has("Ts") ? temperaturesOf(params.get("Ts") ?? "") : start.temperatures,
    sigmaKcal: sigmaFrom !== null ? null : (sigma ?? start.sigmaKcal),
    sigmaFrom,
    by: id("by"),
    property: id("prop"),
    sharedWithin: number(params.get("alike"), 0.01, 20),
  };
}

/** Writes the state into parameters that hold everybody else's; defaults are left out. */
export function writeAveragesState(state: AveragesState, others: URLSearchParams): URLSearchParams {
  const start = defaultAveragesState();
  const params = new URLSearchParams(others);
  const put = (key: string, text: string | null) => {
    if (text === null) params.delete(key);
    else params.set(key, text);
  };
  const same = state.temperatures.join() === start.temperatures.join();
  put("Ts", same ? null : state.temperatures.join(","));
  put("sigref", state.sigmaFrom);
  const typed = state.sigmaFrom === null && state.sigmaKcal !== start.sigmaKcal ? state.sigmaKcal : null;
  put("sig", typed === null ? null : String(typed));
  put("by", state.by);
  put("prop", state.property);
  put("alike", state.sharedWithin === null ? null : String(state.sharedWithin));
  return params;
}

/** The temperatures with one more, rising, each once. */
export function withTemperature(temperatures: readonly number[], added: number): number[] {
  return [...new Set([...temperatures, added])].sort((a, b) => a - b).slice(0, MAX_TEMPERATURES);
}

function temperaturesOf(text: string): number[] {
  const found = text
    .split(",")
    .flatMap((part) => number(part, TEMPERATURE_RANGE_K[0], TEMPERATURE_RANGE_K[1]) ?? []);
  return [...new Set(found)].sort((a, b) => a - b).slice(0, MAX_TEMPERATURES);
}

function number(text: string | null, least: number, most: number): number | null {
  if (text === null || !NUMBER.test(text)) return null;
  const value = Number(text);
  return value >= least && value <= most ? value : null;
}
