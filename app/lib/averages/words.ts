import { atomName } from "../chem/elements.ts";
import {
  capital,
  fixed,
  formatPercent,
  formatPopulation,
  formatTemperature,
  plural,
  pluralWord,
  withUnit,
} from "../format.ts";
import { turnOf } from "./angle.ts";
import type { Average } from "./average.ts";
import type { PropertyValues } from "./property-set.ts";

/**
 * Decimals that a quantity is shown with: as the trade writes it where the unit says, else about four figures.
 *
 * @example digitsFor("°", 179.6) // 0; digitsFor("ppm", 127.37) // 2; digitsFor(null, 0.0123) // 4
 */
export function digitsFor(unit: string | null, value: number | null): number {
  const turn = turnOf(unit);
  if (turn !== null) return turn < 10 ? 3 : 0;
  if (unit === "Å" || unit === "Hz" || unit === "ppm" || unit === "D")
    return unit === "Å" && (value ?? 9) < 1 ? 3 : 2;
  const size = Math.abs(value ?? 1);
  if (size >= 1000) return 0;
  if (size >= 100) return 1;
  if (size >= 10) return 2;
  return size >= 1 || size === 0 ? 3 : 4;
}

/**
 * A measured value with the decimals of the averages beside it, or with its own where it was typed with more.
 *
 * @example asTyped(63.5, 0) // "63.5"; asTyped(7, 2) // "7.00"
 */
export function asTyped(value: number, digits: number): string {
  const own = String(value).split(".")[1]?.length ?? 0;
  return fixed(value, Math.max(digits, Math.min(own, 6)));
}

/** A value of a property with its unit. */
export function valueWords(property: { unit: string | null }, value: number | null): string {
  return withUnit(fixed(value, digitsFor(property.unit, value)), property.unit ?? "");
}

/**
 * What a property is called in a sentence: its own name, or the quantity with the equivalent atoms that it stands for.
 *
 * @example propertyName({ name: "shift_H4", quantity: "shift", atoms: [3, 4] }, elements) // "shift of H4, H5"
 */
export function propertyName(
  { name, quantity, atoms }: Pick<PropertyValues, "name" | "quantity" | "atoms">,
  elements: ArrayLike<number>,
): string {
  return quantity === null || atoms === null
    ? name
    : `${quantity} of ${atoms.map((atom) => atomName(elements, atom)).join(", ")}`;
}

export interface AveragesFinding {
  text: string;
  second: string | null;
}

/** One property with what moves it, for the sentence. */
export interface Told {
  property: PropertyValues;
  average: Average;
  /** Conformer that moves it most. */
  mover: { name: string; population: number; share: number | null; without: number | null } | null;
}

/**
 * What the section says first: the property looked at, and the conformer that makes it; then how many properties there
 * are and what is not covered.
 */
export function averagesFinding(
  told: Told,
  all: readonly { property: PropertyValues; average: Average }[],
  temperatureK: number,
): AveragesFinding {
  const { property, average, mover } = told;
  return {
    text: [headline(property, average, temperatureK), mover ? moverWords(told) : null]
      .filter(Boolean)
      .join(" "),
    second: coverageWords(all),
  };
}

function headline(property: PropertyValues, average: Average, temperatureK: number): string {
  const at = `at ${withUnit(formatTemperature(temperatureK), "K")}`;
  if (average.state === "not-covered") {
    return `${property.name} is known for ${formatPercent(average.covered, 1)} of the population only and is not averaged.`;
  }
  if (average.state === "zero-distance") {
    return `${property.name} holds a distance of 0, which no mean of r to the power −6 or −3 can take: look at its table.`;
  }
  if (average.value === null) {
    return `The directions of ${property.name} cancel ${at} (R ${fixed(average.resultant, 2)}): it has a distribution, not a mean.`;
  }
  if (average.fixed) {
    return `${property.name} is 0, fixed by symmetry: the molecule is achiral, and each shape comes in both hands.`;
  }
  const value = valueWords(property, average.value);
  return property.rule === "r-6"
    ? `An NOE sees ${property.name} as ${value} ${at}.`
    : `${property.name} averages to ${value} ${at}.`;
}

function moverWords({ property, average, mover }: Told): string | null {
  if (mover === null || mover.without === null) return null;
  if (valueWords(property, mover.without) === valueWords(property, average.value)) {
    return "No single conformer moves it in the digits shown.";
  }
  const share =
    mover.share === null
      ? `with ${formatPercent(mover.population)} of the ensemble`
      : `${formatPercent(mover.population)} of the ensemble, ${formatPercent(mover.share)} of the average`;
  return `${mover.name} moves that figure most: ${share}. Without it: ${valueWords(property, mover.without)}.`;
}

/**
 * Share of the population that has a value, in per cent: what is not all of it never reads as 100.0.
 *
 * @example coveredShare(0.999988) // "above 99.9"
 */
export function coveredShare(covered: number): string {
  const figure = formatPopulation(covered);
  return covered < 1 && figure === formatPopulation(1) ? `above ${fixed(99.9, 1)}` : figure;
}

/**
 * Atoms of a signal; hydrogens with the atom that carries them.
 *
 * @param atoms from 0
 * @param bonds pairs of atoms from 0, one after the other
 * @example signalName([10], elements, bonds) // "H11 (on C2)"
 */
export function signalName(
  atoms: readonly number[],
  elements: ArrayLike<number>,
  bonds: ArrayLike<number>,
): string {
  const names = atoms.map((atom) => atomName(elements, atom)).join(", ");
  const on = carrierNames(atoms, elements, bonds);
  return on === "" ? names : `${names} (on ${on})`;
}

/**
 * Atoms that carry the hydrogens of a signal; "" where it has other atoms.
 *
 * @example carrierNames([10], elements, bonds) // "C2"
 */
export function carrierNames(
  atoms: readonly number[],
  elements: ArrayLike<number>,
  bonds: ArrayLike<number>,
): string {
  if (!atoms.every((atom) => elements[atom] === 1)) return "";
  const members = new Set(atoms);
  const carriers = new Set<number>();
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a = -1, b = -1] = [bonds[k], bonds[k + 1]];
    if (members.has(a)) carriers.add(b);
    if (members.has(b)) carriers.add(a);
  }
  return [...carriers]
    .sort((a, b) => a - b)
    .map((atom) => atomName(elements, atom))
    .join(", ");
}

function coverageWords(all: readonly { property: PropertyValues; average: Average }[]): string {
  const scalars = all.filter(({ property }) => property.quantity === null).length;
  const signals = new Map<string, number>();
  for (const { property } of all) {
    if (property.quantity !== null) signals.set(property.quantity, (signals.get(property.quantity) ?? 0) + 1);
  }
  const counts = [
    ...(scalars === 0
      ? []
      : [`${pluralWord(scalars, "property", "properties")}${scalars > 1 ? ", each by its own rule" : ""}`]),
    ...[...signals].map(
      ([quantity, groups]) => `${quantity} of ${plural(groups, "group")} of equivalent atoms`,
    ),
  ];
  // Names stand as they were written, at the start of a sentence too.
  const count = `${scalars === 0 ? counts.join("; ") : capital(counts.join("; "))}.`;
  const partly = all.filter(({ average }) => average.covered < 1 && average.state !== "not-covered");
  const refused = all.filter(({ average }) => average.state === "not-covered");
  const parts = [
    ...partly
      .slice(0, 3)
      .map(
        ({ property, average }) =>
          `${property.name} covers ${withUnit(coveredShare(average.covered), "%")} of the population.`,
      ),
    ...refused
      .slice(0, 3)
      .map(
        ({ property, average }) =>
          `${property.name} covers ${formatPercent(average.covered, 1)} and is not averaged.`,
      ),
  ];
  const more = Math.max(0, partly.length - 3) + Math.max(0, refused.length - 3);
  return [count, ...parts, more > 0 ? `${more} more lack values; the table says which.` : null]
    .filter(Boolean)
    .join(" ");
}
