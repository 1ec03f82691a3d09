/**
 * Coordinates of the conformers of an edition from its own `distinct-set.xyz`, which has every digit of them.
 *
 * @throws RangeError where it does not hold so many structures of so many atoms
 * @example readKeptPositions("1\nx\nH 0 0.5 1\n", 1, 1) // Float64Array [0, 0.5, 1]
 */
export function readKeptPositions(xyz: string, structures: number, atoms: number): Float64Array {
  const lines = xyz.split("\n");
  const height = atoms + 2;
  if (lines.length !== structures * height + 1) {
    throw new RangeError(`${lines.length} lines are no ${structures} structures of ${atoms} atoms.`);
  }
  const positions = new Float64Array(3 * atoms * structures);
  for (let structure = 0; structure < structures; structure++) {
    for (let atom = 0; atom < atoms; atom++) {
      const cells = (lines[structure * height + 2 + atom] ?? "").trim().split(/\s+/);
      for (let axis = 0; axis < 3; axis++) {
        const value = Number(cells[1 + axis]);
        if (!Number.isFinite(value)) throw new RangeError(`“${cells.join(" ")}” is no atom.`);
        positions[3 * (structure * atoms + atom) + axis] = value;
      }
    }
  }
  return positions;
}
