/**
 * Largest distance between two heavy atoms, Å: how stretched a shape is. Of molecules with fewer than two heavy atoms all
 * atoms count.
 *
 * @param positions packed x, y, z of one frame
 * @example shapeExtent([6, 6], Float64Array.of(0, 0, 0, 1.5, 0, 0)) // 1.5
 */
export function shapeExtent(elements: ArrayLike<number>, positions: ArrayLike<number>): number {
  const all = Array.from({ length: elements.length }, (_, atom) => atom);
  const heavy = all.filter((atom) => elements[atom]! > 1);
  const atoms = heavy.length >= 2 ? heavy : all;
  let largest = 0;
  for (const [k, a] of atoms.entries()) {
    for (let j = k + 1; j < atoms.length; j++) {
      const b = atoms[j]!;
      const distance = Math.hypot(
        positions[3 * a]! - positions[3 * b]!,
        positions[3 * a + 1]! - positions[3 * b + 1]!,
        positions[3 * a + 2]! - positions[3 * b + 2]!,
      );
      if (distance > largest) largest = distance;
    }
  }
  return largest;
}
