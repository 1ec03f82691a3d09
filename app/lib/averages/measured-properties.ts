import { turnOf, wrapTurn } from "./angle.ts";
import type { MeasuredProperties } from "./averaging.ts";
import { MOST_MEASURED } from "./measured.ts";
import { type PastedValues, readLines } from "./pasted.ts";
import { type Agreement, againstMeasured } from "./shielding-fit.ts";

/** Measured values of properties of the whole molecule (couplings, distances, a dipole moment) by the name of their column. */
export type PropertyMeasurements = ReadonlyMap<string, number>;

/** The parameter of an address that holds a draft of them. */
export const MEASURED_PROPERTIES_PARAM = "measp";

/** The largest value that can be kept, either sign. */
export const MEASURED_MOST = 999_999;

const NUMBER = /^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d{1,2})?$/i;

function numberOf(text: string | undefined): number | null {
  if (text === undefined || !NUMBER.test(text)) return null;
  const value = Number(text);
  return Math.abs(value) <= MEASURED_MOST ? value : null;
}

/**
 * Reads "3J H4-H5~7.2~dipole~1.85"; nonsense counts as absent.
 *
 * @example readMeasuredProperties("dipole~1.85").get("dipole") // 1.85
 */
export function readMeasuredProperties(text: string): Map<string, number> {
  const values = new Map<string, number>();
  const parts = text.split("~").slice(0, 2 * MOST_MEASURED);
  for (let k = 0; k + 1 < parts.length; k += 2) {
    const value = numberOf(parts[k + 1]);
    if (parts[k] !== "" && value !== null) values.set(decode(parts[k] ?? ""), value);
  }
  return values;
}

/** Writes them, by name; empty where nothing is measured. */
export function writeMeasuredProperties(values: PropertyMeasurements): string {
  return byName(values)
    .map(([name, value]) => `${encode(name)}~${value}`)
    .join("~");
}

/** As they are kept with the ensemble; the same values always give the same record. */
export function measuredPropertiesRecord(values: PropertyMeasurements): MeasuredProperties {
  return { values: byName(values) };
}

const byName = (values: PropertyMeasurements) => [...values].sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0));
const encode = (name: string) => name.replaceAll("%", "%25").replaceAll("~", "%7E");
const decode = (name: string) => name.replaceAll("%7E", "~").replaceAll("%25", "%");

/**
 * Measured values out of pasted lines: the name of a property, then the value. Letter case and spaces at the ends do not
 * matter where one property alone is meant.
 *
 * @param commas true where somebody said that commas are decimal ones
 * @returns values by the name of the column, and the lines that say no such thing
 * @example readPastedProperties("3J H4-H5 7.2\ndipole; 1.85", ["3J H4-H5", "dipole"]).values
 */
export function readPastedProperties(
  text: string,
  names: readonly string[],
  commas = false,
): PastedValues<string> {
  return readLines(
    text,
    (line) => {
      const said = /^(.*?)[\s;=:]+(\S+)$/.exec(line);
      return { key: nameMeant((said?.[1] ?? "").trim(), names), number: said?.[2] };
    },
    numberOf,
    commas,
  );
}

function nameMeant(said: string, names: readonly string[]): string | null {
  if (names.includes(said)) return said;
  const alike = names.filter((name) => name.toLowerCase() === said.toLowerCase());
  return alike.length === 1 ? (alike[0] ?? null) : null;
}

/** A property with its average, as it is set beside a measured value. */
export interface AveragedFigure {
  name: string;
  unit: string | null;
  rule: string;
  average: number | null;
  /** Standard deviation that the error of the level makes of the average; null where it is not known. */
  error: number | null;
}

export interface FigureBeside extends AveragedFigure {
  measured: number | null;
  /** Average minus measured; of an angle within half a turn. */
  difference: number | null;
}

/** Properties of one unit: how well they meet their measured values together. */
export interface UnitAgreement {
  unit: string;
  agreement: Agreement;
  /** Name of the property with the largest deviation. */
  farthest: string;
}

/**
 * Averages of properties beside measured values. Values are judged together unit by unit; numbers without a unit may be
 * anything and are not.
 *
 * @example besideProperties([{ name: "3J", unit: "Hz", rule: "linear", average: 7.0, error: null }],
 *   new Map([["3J", 7.2]])).units[0]?.agreement.mad // 0.2
 */
export function besideProperties(
  figures: readonly AveragedFigure[],
  values: PropertyMeasurements,
): { rows: FigureBeside[]; units: UnitAgreement[] } {
  const rows = figures.map((figure): FigureBeside => {
    const measured = values.get(figure.name) ?? null;
    return { ...figure, measured, difference: differenceOf(figure, measured) };
  });
  const known = rows.flatMap(({ name, unit, rule, measured, difference }) =>
    unit === null || measured === null || difference === null
      ? []
      : [{ name, unit, rule, measured, difference }],
  );
  const units = [...new Set(known.map(({ unit }) => unit))].flatMap((unit): UnitAgreement[] => {
    const own = known.filter((one) => one.unit === unit);
    const agreement = againstMeasured(
      own.map(({ measured, difference }) => measured + difference),
      own.map(({ measured }) => measured),
    );
    if (agreement === null) return [];
    // Angles go round: a straight line against them means nothing.
    const corrected = own.some(({ rule }) => rule === "circular") ? null : agreement.corrected;
    return [{ unit, agreement: { ...agreement, corrected }, farthest: own[agreement.maxPlace]?.name ?? "" }];
  });
  return { rows, units };
}

function differenceOf({ average, rule, unit }: AveragedFigure, measured: number | null): number | null {
  if (average === null || measured === null) return null;
  return rule === "circular" ? wrapTurn(average - measured, turnOf(unit) ?? 360) : average - measured;
}
