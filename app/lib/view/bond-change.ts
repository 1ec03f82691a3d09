import { atomName } from "../chem/elements.ts";

/** How the bonds of a structure differ from its group's, in flat pairs, and in words. */
export interface BondChange {
  formed: number[];
  broken: number[];
  /** Atoms that left one partner for another; without such an atom all that lost or gained a bond. */
  moved: number[];
  words: string;
}

/**
 * Bonds that a structure has and its group has not, and the other way round.
 *
 * @returns null where they are the same
 * @example bondChange([1, 8, 7], [0, 2], [0, 1])?.words // "H1 now on O2"
 */
export function bondChange(
  elements: ArrayLike<number>,
  group: readonly number[],
  own: readonly number[],
): BondChange | null {
  const [theirs, ours] = [bondKeys(group, elements.length), bondKeys(own, elements.length)];
  const formed = flat(
    [...ours].filter((key) => !theirs.has(key)),
    elements.length,
  );
  const broken = flat(
    [...theirs].filter((key) => !ours.has(key)),
    elements.length,
  );
  if (formed.length === 0 && broken.length === 0) return null;
  const sentences: string[] = [];
  const told = new Set<string>();
  const moved = [...new Set(broken)].filter((atom) => {
    const gained = partners(formed, atom);
    const lost = partners(broken, atom);
    if (gained.length !== 1 || lost.length !== 1 || elements[atom] !== 1) return false;
    sentences.push(`${atomName(elements, atom)} now on ${atomName(elements, gained[0]!)}`);
    told.add(`${Math.min(atom, gained[0]!)} ${Math.max(atom, gained[0]!)}`);
    told.add(`${Math.min(atom, lost[0]!)} ${Math.max(atom, lost[0]!)}`);
    return true;
  });
  for (const [pairs, word] of [
    [broken, "broken"],
    [formed, "formed"],
  ] as const) {
    for (let k = 0; k < pairs.length; k += 2) {
      const [i, j] = [pairs[k]!, pairs[k + 1]!];
      if (!told.has(`${i} ${j}`)) {
        sentences.push(`${atomName(elements, i)}\u2013${atomName(elements, j)} ${word}`);
      }
    }
  }
  const rest = [...new Set([...formed, ...broken])].sort((a, b) => a - b);
  return { formed, broken, moved: moved.length > 0 ? moved : rest, words: sentences.join(", ") };
}

function bondKeys(bonds: readonly number[], atoms: number): Set<number> {
  const keys = new Set<number>();
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    keys.add(Math.min(bonds[k]!, bonds[k + 1]!) * atoms + Math.max(bonds[k]!, bonds[k + 1]!));
  }
  return keys;
}

function flat(keys: number[], atoms: number): number[] {
  return keys.sort((a, b) => a - b).flatMap((key) => [Math.floor(key / atoms), key % atoms]);
}

function partners(pairs: readonly number[], atom: number): number[] {
  const found: number[] = [];
  for (let k = 0; k + 1 < pairs.length; k += 2) {
    if (pairs[k] === atom) found.push(pairs[k + 1]!);
    if (pairs[k + 1] === atom) found.push(pairs[k]!);
  }
  return found;
}
