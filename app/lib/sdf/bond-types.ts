import type { AtomFault } from "../xyz/atom-line.ts";
import { queryFeature } from "./faults.ts";

export const AROMATIC = 4;
export const COORDINATION = 9;
export const HYDROGEN_BOND = 10;

/** Types 1 to 4, 9 and 10 are bonds of a structure; 5 to 8 are questions (row S08). */
export function bondTypeFault(type: number, found: string): AtomFault | null {
  if ((type >= 1 && type <= AROMATIC) || type === COORDINATION || type === HYDROGEN_BOND) return null;
  const query = type >= 5 && type <= 8;
  return queryFeature(
    query ? `Bond type ${type} asks for several bonds.` : `There is no bond type ${type}.`,
    found,
  );
}

/**
 * What the bonds of an atom add up to: single, double and triple as such, aromatic ones 1.5 each and the sum rounded
 * down, coordination and hydrogen bonds nothing.
 */
export function bondSum(types: readonly number[]): number {
  let sum = 0;
  for (const type of types) sum += type === AROMATIC ? 1.5 : type < AROMATIC ? type : 0;
  return Math.floor(sum);
}
