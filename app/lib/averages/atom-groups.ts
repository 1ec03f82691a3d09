/** A per-atom quantity of one atom (from 0) over the conformers. */
export interface AtomColumn {
  atom: number;
  values: readonly (number | null)[];
}

/** Atoms that give one signal, with their common value in every conformer. */
export interface AtomGroup {
  /** From 0, ascending. */
  atoms: number[];
  values: (number | null)[];
}

/**
 * Merges per-atom values over equivalent atoms, conformer by conformer, before anything is averaged over conformers. A
 * conformer whose file numbers equivalent atoms otherwise is read in the numbering of the reference first.
 *
 * @param classes smallest atom of each atom's class, as `ParityGroup.classes` gives them
 * @param relabel of a conformer: where each atom of the reference stands in it; null where it is numbered alike
 * @returns groups by their first atom; a conformer in which one member's value is missing has none
 * @example mergeEquivalentAtoms([{ atom: 1, values: [2] }, { atom: 2, values: [4] }], Int32Array.of(0, 1, 1), () => null)
 * // [{ atoms: [1, 2], values: [3] }]
 */
export function mergeEquivalentAtoms(
  columns: readonly AtomColumn[],
  classes: ArrayLike<number>,
  relabel: (conformer: number) => ArrayLike<number> | null,
): AtomGroup[] {
  const byAtom = new Map(columns.map((column) => [column.atom, column]));
  const groups = new Map<number, number[]>();
  for (const atom of [...byAtom.keys()].sort((a, b) => a - b)) {
    const key = classes[atom] ?? atom;
    const members = groups.get(key);
    if (members) members.push(atom);
    else groups.set(key, [atom]);
  }
  const conformers = columns[0]?.values.length ?? 0;
  return [...groups.values()].map((atoms) => ({
    atoms,
    values: Array.from({ length: conformers }, (_, row) => meanOf(atoms, row)),
  }));

  function meanOf(atoms: readonly number[], row: number): number | null {
    const map = relabel(row);
    let total = 0;
    for (const atom of atoms) {
      const value = byAtom.get(map?.[atom] ?? atom)?.values[row] ?? null;
      if (value === null) return null;
      total += value;
    }
    return total / atoms.length;
  }
}

/**
 * Classes of equivalent atoms with groups that somebody took apart: atoms of a class stay together only where every
 * split has them in one part. A split never joins what symmetry holds apart.
 *
 * @param classes smallest atom of each atom's class
 * @param splits parts of atoms (from 0), a list a split
 * @returns smallest atom of each atom's class
 * @example splitClasses([0, 1, 1, 1], [[[1], [2, 3]]]) // [0, 1, 2, 2]
 */
export function splitClasses(
  classes: ArrayLike<number>,
  splits: readonly (readonly (readonly number[])[])[],
): Int32Array {
  const keys = Array.from(classes, String);
  for (const parts of splits) {
    for (const [k, part] of parts.entries()) {
      for (const atom of part) if (keys[atom] !== undefined) keys[atom] += `/${k}`;
    }
    for (const [atom, key] of keys.entries()) keys[atom] = `${key};`;
  }
  const firsts = new Map<string, number>();
  return Int32Array.from(keys, (key, atom) => {
    const first = firsts.get(key) ?? atom;
    firsts.set(key, first);
    return first;
  });
}
