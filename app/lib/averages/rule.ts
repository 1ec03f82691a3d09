import { columnUnit } from "../csv/column-unit.ts";
import { turnOf } from "./angle.ts";

/** How a quantity is averaged over conformers. */
export const AVERAGE_RULES = ["linear", "r-6", "r-3", "circular", "rms", "odd"] as const;
export type AverageRule = (typeof AVERAGE_RULES)[number];

/** What each rule is for, in a chemist's words; the first part names it in tables. */
export const RULE_WORDS: Record<AverageRule, { name: string; when: string }> = {
  linear: { name: "linear", when: "A plain weighted mean: energies, couplings, shifts, descriptors." },
  "r-6": {
    name: "r to the power −6",
    when: "A distance as an NOE sees it, tumbling slower than the exchange.",
  },
  "r-3": { name: "r to the power −3", when: "Motion faster than tumbling, such as a turning methyl group." },
  circular: { name: "circular", when: "An angle that runs all the way round, such as a torsion." },
  rms: { name: "root of mean square", when: "The length of a vector, such as a dipole moment." },
  odd: { name: "linear, both hands", when: "Changes sign in the mirror image, such as optical rotation." },
};

/**
 * The rule of a column that nobody has said anything about: angles in degrees go round, everything else is a plain mean.
 *
 * @example initialRule("°") // "circular"; initialRule("Å") // "linear"
 */
export function initialRule(unit: string | null): "circular" | "linear" {
  return unit !== null && columnUnit(unit)?.unit === "°" ? "circular" : "linear";
}

/** The rule as stored, or that of a column without one. */
export function ruleOf(column: { rule: string | null; unit: string | null }): AverageRule {
  return AVERAGE_RULES.find((rule) => rule === column.rule) ?? initialRule(column.unit);
}

/**
 * Whether a name is that of a quantity which changes sign in the mirror image. Names as the trade writes them; common
 * practice, no source.
 *
 * @example isPseudoscalar("Optical rotation 589 nm") // true
 */
export function isPseudoscalar(name: string): boolean {
  return /(optical|specific|molar)[ _-]*rotation|rotat(ory|ional)[ _-]*strength|circular[ _-]*dichroism|\b[ev]?cd\b|\boptrot\b|\bord\b/i.test(
    name.replaceAll("_", " "),
  );
}

/**
 * Whether a name is that of an angle between bonds or planes: it keeps its sign in the mirror image and does not go round,
 * as a torsion does. Names as the trade writes them; common practice, no source.
 *
 * @example isBondAngle("C-C-C angle") // true; isBondAngle("torsion angle") // false
 */
export function isBondAngle(name: string): boolean {
  const words = name.replaceAll("_", " ");
  return (
    /\b(angle|bend|bending|valence|tilt)\b/i.test(words) && !/torsion|dihedral|phase|azimuth/i.test(words)
  );
}

/** True for a unit of length, where r^-6 and r^-3 can be meant. */
export function isLength(unit: string | null): boolean {
  return unit !== null && columnUnit(unit)?.family === "length";
}

/**
 * What a rule averages, where a unit says that the column is none of it; null where the rule may be meant. A column without
 * a unit may be either: its numbers are then degrees, or distances.
 *
 * @example ruleAgainstUnit("circular", "Å") // "an angle in °, rad or mrad"
 */
export function ruleAgainstUnit(rule: AverageRule, unit: string | null): string | null {
  if (unit === null || unit === "") return null;
  if (rule === "circular" && turnOf(unit) === null) return "an angle in °, rad or mrad";
  if ((rule === "r-6" || rule === "r-3") && !isLength(unit)) return "a distance in Å, nm, pm or bohr";
  return null;
}

/**
 * Rules that can be meant for a quantity, the one to propose first.
 *
 * @example possibleRules({ name: "d_C1_ortho", unit: "Å" }) // ["r-6", "r-3", "linear"]
 */
export function possibleRules(column: { name: string; unit: string | null }): AverageRule[] {
  if (isPseudoscalar(column.name)) return ["odd", "linear"];
  if (turnOf(column.unit) !== null) {
    return isBondAngle(column.name) ? ["linear", "circular"] : ["circular", "linear"];
  }
  if (isLength(column.unit)) {
    return /gyration|largest|\brg\b/i.test(column.name.replaceAll("_", " "))
      ? ["linear", "r-6", "r-3"]
      : ["r-6", "r-3", "linear"];
  }
  return /dipole/i.test(column.name) ? ["rms", "linear"] : ["linear"];
}
