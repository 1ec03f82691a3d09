import { neighboursOf } from "../chem/rings.ts";
import type { Graph } from "../structure.ts";

/**
 * Ways to take a group of equivalent atoms apart that suggest themselves: by the atom that carries them (the two methyls
 * of a dimethylamide), and each atom on its own.
 *
 * @param atoms of one group, from 0
 * @returns parts, each sorted; no way for a single atom
 * @example waysToSplit(ethane, [2, 3, 4, 5, 6, 7])[0] // { way: "carrier", parts: [[2, 3, 4], [5, 6, 7]] }
 */
export function waysToSplit(
  graph: Graph,
  atoms: readonly number[],
): { way: "carrier" | "each"; parts: number[][] }[] {
  if (atoms.length < 2) return [];
  const carried = new Map<string, number[]>();
  for (const atom of atoms) {
    const around = neighboursOf(graph, atom);
    // Only hydrogens and halogens hang on one atom; what has several neighbours is a place of its own.
    const key = around.length === 1 ? `on ${around[0]}` : `is ${atom}`;
    carried.set(key, [...(carried.get(key) ?? []), atom]);
  }
  const each = { way: "each" as const, parts: atoms.map((atom) => [atom]) };
  if (carried.size < 2 || carried.size === atoms.length) return [each];
  return [{ way: "carrier", parts: [...carried.values()] }, each];
}
