import { atomName } from "../chem/elements.ts";
import { GENERAL_SET, KARPLUS_SETS } from "./karplus.ts";
import type { Observable } from "./observable.ts";

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
  return `Karplus, ${name}${count > 1 ? `, ${count} torsions` : ""}`;
}
