import { kindOfLevel, type LevelKind } from "../levels/better-level.ts";
import type { HoursSource } from "./plan.ts";

/** A rule of thumb: common practice, no source. Core hours at `atoms` atoms; other sizes by the exponent. */
export interface Rule {
  id: string;
  label: string;
  hours: number;
  atoms: number;
  exponent: number;
}

/**
 * Core hours of one structure of 40 atoms and how they grow with the number of atoms. All of them: rule of thumb,
 * common practice, no source. They differ by more than ten times between programs, machines and basis sets.
 */
export const RULES: readonly Rule[] = [
  { id: "force-field", label: "force field, optimised", hours: 0.0003, atoms: 40, exponent: 2 },
  { id: "semi-empirical", label: "semi-empirical, optimised", hours: 0.02, atoms: 40, exponent: 2 },
  { id: "hf-optimise", label: "Hartree-Fock, optimised", hours: 10, atoms: 40, exponent: 3 },
  { id: "dft-energy", label: "density functional, energy only", hours: 0.5, atoms: 40, exponent: 3 },
  { id: "dft-optimise", label: "density functional, optimised", hours: 10, atoms: 40, exponent: 3 },
  { id: "dft-frequencies", label: "density functional, frequencies", hours: 12, atoms: 40, exponent: 4 },
  { id: "mp2-energy", label: "second-order perturbation, energy only", hours: 4, atoms: 40, exponent: 5 },
  {
    id: "cc-energy",
    label: "coupled cluster with triples, energy only",
    hours: 2000,
    atoms: 40,
    exponent: 7,
  },
];

/** Which rule a level starts with, by the kind that its name speaks of. */
const RULE_OF: Record<LevelKind, string | null> = {
  "force field": "force-field",
  "semi-empirical": "semi-empirical",
  "Hartree-Fock": "hf-optimise",
  "density functional": "dft-optimise",
  "second-order perturbation": "mp2-energy",
  "coupled cluster": "cc-energy",
  reference: null,
};

/**
 * The hours that a step starts with, until somebody sets them: none where the energies are known, else the rule of thumb
 * for the kind of method that the name speaks of, else not known.
 *
 * @example defaultHours("MMFF94", false) // { from: "rule", rule: "force-field" }
 * @example defaultHours("next level", false) // { from: "unknown" }
 */
export function defaultHours(name: string, known: boolean): HoursSource {
  if (known) return { from: "known" };
  const kind = kindOfLevel(name);
  const rule = kind === null ? null : RULE_OF[kind];
  return rule === null ? { from: "unknown" } : { from: "rule", rule };
}

export interface HoursEach {
  /** Core hours a structure. */
  hours: number;
  /** Of a size scaling: the exponent, fitted or typed; else null. */
  exponent: number | null;
  fitted: boolean;
}

/**
 * Core hours of one structure of `atoms` atoms.
 *
 * Timings of the molecule itself: their mean. Timings of other sizes: t = t0 (N/N0)^alpha through their geometric mean,
 * alpha from a straight line through ln t against ln N where there are two sizes or more, else as typed.
 *
 * Known energies cost nothing; hours that are not known count as 0, and what is written of them has to say so.
 *
 * @throws RangeError on an unknown rule of thumb
 * @example hoursEach({ from: "scaled", timings: [{ atoms: 20, hours: 1 }, { atoms: 40, hours: 8 }], exponent: 3 }, 30).hours // 3.375
 */
export function hoursEach(source: HoursSource, atoms: number): HoursEach {
  if (source.from === "known" || source.from === "unknown") {
    return { hours: 0, exponent: null, fitted: false };
  }
  if (source.from === "typed") return { hours: source.hours, exponent: null, fitted: false };
  if (source.from === "timings") {
    const mean = source.hours.reduce((sum, h) => sum + h, 0) / source.hours.length;
    return { hours: mean, exponent: null, fitted: false };
  }
  if (source.from === "rule") {
    const rule = RULES.find(({ id }) => id === source.rule);
    if (!rule) throw new RangeError(`No rule of thumb is called ${source.rule}.`);
    return {
      hours: rule.hours * (atoms / rule.atoms) ** rule.exponent,
      exponent: rule.exponent,
      fitted: false,
    };
  }
  return scale(source.timings, source.exponent, atoms);
}

function scale(
  timings: readonly { atoms: number; hours: number }[],
  typed: number,
  atoms: number,
): HoursEach {
  const x = timings.map((t) => Math.log(t.atoms));
  const y = timings.map((t) => Math.log(t.hours));
  const mx = x.reduce((s, v) => s + v, 0) / x.length;
  const my = y.reduce((s, v) => s + v, 0) / y.length;
  let sxx = 0;
  let sxy = 0;
  for (const [k, v] of x.entries()) {
    sxx += (v - mx) ** 2;
    sxy += (v - mx) * (y[k]! - my);
  }
  const fitted = sxx > 0;
  const exponent = fitted ? sxy / sxx : typed;
  return { hours: Math.exp(my + exponent * (Math.log(atoms) - mx)), exponent, fitted };
}
