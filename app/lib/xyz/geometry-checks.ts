import { COVALENT_RADII } from "../chem/elements.ts";

/** Bonded means within this many times the summed covalent radii (the rule of bond perception). */
const BOND_FACTOR = 1.2;

/** No atom has a neighbour nearer than that, as a multiple of the summed covalent radii, where bohr are read as Å. */
const NEAREST_IN_BOHR = 1.4;

/**
 * Nearest neighbour of an atom as a multiple of the summed covalent radii; Infinity where there is none. Below
 * `NEAREST_IN_BOHR` any neighbour's will do.
 */
function nearestRatio(elements: Uint8Array, positions: Float64Array, atom: number): number {
  const radius = COVALENT_RADII[elements[atom]!]!;
  let nearest = Infinity;
  for (let other = 0; other < elements.length; other++) {
    const sum = radius + COVALENT_RADII[elements[other]!]!;
    if (other === atom || COVALENT_RADII[elements[other]!] === 0) continue;
    const dx = positions[3 * atom]! - positions[3 * other]!;
    const dy = positions[3 * atom + 1]! - positions[3 * other + 1]!;
    const dz = positions[3 * atom + 2]! - positions[3 * other + 2]!;
    const ratio = (dx * dx + dy * dy + dz * dz) / (sum * sum);
    if (ratio >= nearest) continue;
    nearest = ratio;
    if (Math.sqrt(nearest) < NEAREST_IN_BOHR) break;
  }
  return Math.sqrt(nearest);
}

/**
 * Whether the distances look like bohr read as Å: nobody has a bond, and the typical nearest neighbour lies at about
 * 1.9 times the summed covalent radii (row X27). Bounds 1.4 for each atom (triple bonds of 1.15 Å come to 1.49 in bohr),
 * 1.45 and 2.3 for the middle one are ours: bonds run from 0.8 to 1.2.
 *
 * Costs no more than one pass over the atoms for any molecule in Å, as its first atom is bonded.
 */
export function looksLikeBohr(elements: Uint8Array, positions: Float64Array): boolean {
  const ratios: number[] = [];
  for (let atom = 0; atom < elements.length; atom++) {
    if (COVALENT_RADII[elements[atom]!] === 0) continue;
    const ratio = nearestRatio(elements, positions, atom);
    if (ratio < NEAREST_IN_BOHR) return false;
    ratios.push(ratio);
  }
  if (ratios.length < 3) return false;
  ratios.sort((a, b) => a - b);
  const middle = ratios[ratios.length >> 1]!;
  return middle >= 1.45 && middle < 2.3;
}

/**
 * The first pair of atoms that is bonded only across the walls of the cell (row X35), or null.
 *
 * @param cell three lattice vectors, row by row, in Å
 * @param periodic for each vector whether the file repeats along it
 * @returns indices from 0
 */
export function bondAcrossCell(
  elements: Uint8Array,
  positions: Float64Array,
  cell: Float64Array,
  periodic: readonly boolean[],
): [number, number] | null {
  const inverse = invert(cell);
  if (!inverse) return null;
  const fractions = toFractions(positions, inverse);
  const shift = new Float64Array(3);
  for (let a = 0; a < elements.length; a++) {
    for (let b = a + 1; b < elements.length; b++) {
      let wraps = false;
      for (let k = 0; k < 3; k++) {
        shift[k] = periodic[k] ? Math.round(fractions[3 * b + k]! - fractions[3 * a + k]!) : 0;
        if (shift[k] !== 0) wraps = true;
      }
      // Most pairs have their nearest image in the cell itself and cost no more than this.
      if (wraps && bondsByShift(elements, positions, cell, shift, a, b)) return [a, b];
    }
  }
  return null;
}

function toFractions(positions: Float64Array, inverse: Float64Array): Float64Array {
  return positions.map((_, at) => {
    const k = at % 3;
    const from = at - k;
    return (
      positions[from]! * inverse[k]! +
      positions[from + 1]! * inverse[3 + k]! +
      positions[from + 2]! * inverse[6 + k]!
    );
  });
}

function bondsByShift(
  elements: Uint8Array,
  positions: Float64Array,
  cell: Float64Array,
  shift: Float64Array,
  a: number,
  b: number,
): boolean {
  const radii = [COVALENT_RADII[elements[a]!]!, COVALENT_RADII[elements[b]!]!] as const;
  if (radii[0] === 0 || radii[1] === 0) return false;
  let square = 0;
  for (let axis = 0; axis < 3; axis++) {
    const moved = shift[0]! * cell[axis]! + shift[1]! * cell[3 + axis]! + shift[2]! * cell[6 + axis]!;
    square += (positions[3 * b + axis]! - positions[3 * a + axis]! - moved) ** 2;
  }
  return Math.sqrt(square) <= BOND_FACTOR * (radii[0] + radii[1]);
}

function invert(m: Float64Array): Float64Array | null {
  const minor = (i: number, j: number, k: number, l: number) => m[i]! * m[j]! - m[k]! * m[l]!;
  const c = [minor(4, 8, 5, 7), minor(5, 6, 3, 8), minor(3, 7, 4, 6)];
  const determinant = m[0]! * c[0]! + m[1]! * c[1]! + m[2]! * c[2]!;
  if (!(Math.abs(determinant) > 1e-9)) return null;
  const rows = [c[0]!, minor(2, 7, 1, 8), minor(1, 5, 2, 4), c[1]!, minor(0, 8, 2, 6), minor(2, 3, 0, 5)];
  rows.push(c[2]!, minor(1, 6, 0, 7), minor(0, 4, 1, 3));
  return Float64Array.from(rows, (value) => value / determinant);
}
