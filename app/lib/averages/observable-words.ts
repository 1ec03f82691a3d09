import { atomName } from "../chem/elements.ts";
import type { Graph } from "../structure.ts";
import { GENERAL_SET, GENERAL_SOURCE, KARPLUS_SETS, OWN_SET } from "./karplus.ts";
import type { Observable } from "./observable.ts";
import { peptideChain, phiName } from "./peptide.ts";

const HEAD = { distance: "d", angle: "angle", torsion: "torsion", coupling: "3J" } as const;

/**
 * Name of a column made of picked atoms, counted from 1 as in the file.
 *
 * @example observableName(torsion, elements) // "torsion C3–C4–N5–S6"; a coupling "3J H18–C1–C2–H21"
 */
export function observableName(observable: Observable, elements: ArrayLike<number>): string {
  const atoms = (observable.tuples[0] ?? []).map((atom) => atomName(elements, atom)).join("\u2013");
  const count = observable.tuples.length;
  const merged = count > 1 ? ` (mean of ${count})` : "";
  return `${HEAD[observable.kind]} ${atoms}${merged}`;
}

/** How an observable is made, in words: "6 equivalent pairs averaged first". */
export function observableWords(observable: Observable): string {
  const { kind, tuples, set } = observable;
  const count = tuples.length;
  if (kind === "distance") return count > 1 ? `${count} equivalent pairs averaged first` : "picked distance";
  if (kind !== "coupling") return `picked ${kind}`;
  const name =
    set === GENERAL_SET
      ? "general H–C–C–H set"
      : (KARPLUS_SETS.find((one) => one.id === set)?.name ?? "own parameters");
  const angle = observable.angle === "phi" ? ", t from φ" : "";
  return `Karplus, ${name}${angle}${count > 1 ? `, ${count} torsions` : ""}`;
}

/** Where a coupling comes from: its formula, its source, and what its angle is. */
export interface CouplingWords {
  formula: string;
  source: string;
  angle: string;
}

/**
 * What the angle t of a coupling is, in words: phi - 60 degrees of the residue for a peptide set, else the picked torsion
 * and, for a peptide set, why.
 *
 * @example couplingWords(graph, [13, 3, 4, 14], { set: "hn-ha-1993", own: null, angle: "phi" }).angle
 * // "t = φ − 60° with φ the torsion C2–N4–C5–C7 (...)"
 */
export function couplingWords(
  graph: Graph,
  path: readonly number[],
  { set, own, angle }: Pick<Observable, "set" | "own" | "angle">,
): CouplingWords {
  const picked = path.map((atom) => atomName(graph.elements, atom)).join("–");
  const found = KARPLUS_SETS.find((one) => one.id === set);
  if (set === GENERAL_SET) {
    return {
      formula: "J = P1 cos² t + P2 cos t + P3 + Σ ΔX [P4 + P5 cos²(ξ t + P6 |ΔX|)]",
      source: GENERAL_SOURCE,
      angle: `t is the picked torsion ${picked}.`,
    };
  }
  const { a, b, c } = found ?? own ?? { a: 0, b: 0, c: 0 };
  const figure = (value: number) => String(Math.abs(value));
  const joined = (value: number) => (value < 0 ? "−" : "+");
  const formula = `J = ${a < 0 ? "−" : ""}${figure(a)} cos² t ${joined(b)} ${figure(b)} cos t ${joined(c)} ${figure(c)} Hz`;
  const source = found?.source ?? (set === OWN_SET ? "own A, B, C" : "");
  if (found === undefined) return { formula, source, angle: `t is the picked torsion ${picked}.` };
  const chain = peptideChain(graph, path);
  if (chain !== null && angle === "phi") {
    const phi = phiName(graph.elements, chain);
    const ha = atomName(graph.elements, chain.ha);
    return {
      formula,
      source,
      angle: `t = φ − 60° with φ the torsion ${phi}, as the set was published for (φ + 60° in a structure where ${ha} stands on the other side, as in a D residue). The torsion ${picked} itself would move with an N–H out of plane.`,
    };
  }
  const why =
    chain === null
      ? "The set was published for φ − 60° of a peptide residue; these atoms stand in no such chain C(=O)–N–C–C(=O)."
      : "The set was published for φ − 60°; this column was measured before that was told apart. Measure it again to have it by φ.";
  return { formula, source, angle: `t is the picked torsion ${picked}. ${why}` };
}
