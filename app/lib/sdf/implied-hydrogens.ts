import { AROMATIC, bondSum, COORDINATION } from "./bond-types.ts";

/** Atoms and bonds of a MOL block as its valences see them. */
export interface BondTable {
  readonly elements: ArrayLike<number>;
  /** Pairs of atoms from 0, flat. */
  readonly bonds: ArrayLike<number>;
  /** Bond types of the format, one a bond. */
  readonly types: ArrayLike<number>;
  readonly charges: ArrayLike<number> | null;
  readonly radicals: ArrayLike<number> | null;
  /** Stated number of bonds of an atom, hydrogens without position counted; -1 where none is stated. */
  readonly valences: ArrayLike<number> | null;
}

/** Bonds that a neutral atom makes, smallest first; textbook valences. Other elements imply no hydrogens. */
const VALENCES: Readonly<Record<number, readonly number[]>> = {
  5: [3],
  6: [4],
  7: [3, 5],
  8: [2],
  9: [1],
  13: [3],
  14: [4],
  15: [3, 5],
  16: [2, 4, 6],
  17: [1, 3, 5, 7],
  32: [4],
  33: [3, 5],
  34: [2, 4, 6],
  35: [1, 3, 5, 7],
  52: [2, 4, 6],
  53: [1, 3, 5, 7],
};

export interface ImpliedHydrogens {
  /** Hydrogens without position, one number an atom. */
  readonly counts: Uint8Array;
  readonly total: number;
  /** At least one atom misses its smallest valence: not merely a charge left out at one that has several. */
  readonly certain: boolean;
}

/**
 * Hydrogens that a MOL block implies without giving them a position: what an atom's bonds lack to its next valence, or
 * to the valence stated for it. A charged atom has the valences of the neutral element with as many electrons; a doublet
 * takes the place of one bond, a singlet or triplet that of two. Atoms with aromatic bonds imply only up to their smallest valence.
 *
 * Source: the valence model that the CTfile description means by "default valences", from memory; the numbers are
 * textbook valences.
 *
 * @example impliedHydrogens({ elements: [6, 8], bonds: [0, 1], types: [1], ...none }).total // 4 (methanol)
 */
export function impliedHydrogens(table: BondTable): ImpliedHydrogens {
  const { elements, bonds, types } = table;
  const typesAt: number[][] = Array.from({ length: elements.length }, () => []);
  for (let k = 0; k < types.length; k++) {
    typesAt[bonds[2 * k]!]!.push(types[k]!);
    typesAt[bonds[2 * k + 1]!]!.push(types[k]!);
  }
  const counts = new Uint8Array(elements.length);
  let total = 0;
  let certain = false;
  typesAt.forEach((own, atom) => {
    const missing = missingAt(table, atom, own);
    counts[atom] = missing.count;
    total += missing.count;
    if (missing.certain && missing.count > 0) certain = true;
  });
  return { counts, total, certain };
}

function missingAt(
  table: BondTable,
  atom: number,
  types: readonly number[],
): { count: number; certain: boolean } {
  const sum = bondSum(types);
  const stated = table.valences?.[atom] ?? -1;
  if (stated >= 0) return { count: Math.max(0, stated - sum), certain: true };
  const valences = VALENCES[table.elements[atom]! - (table.charges?.[atom] ?? 0)];
  if (!VALENCES[table.elements[atom]!] || !valences || types.includes(COORDINATION))
    return { count: 0, certain: false };
  const taken = sum + [0, 2, 1, 2][table.radicals?.[atom] ?? 0]!;
  const smallest = valences[0]!;
  if (taken <= smallest) return { count: smallest - taken, certain: true };
  if (types.includes(AROMATIC)) return { count: 0, certain: false };
  const next = valences.find((valence) => valence >= taken) ?? taken;
  return { count: next - taken, certain: false };
}
