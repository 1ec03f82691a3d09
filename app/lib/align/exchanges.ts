import type { SymmetryPlan } from "./plan.ts";

/**
 * All exchanges of a plan, one by one, in local numbers; the first is the identity. For small groups only: their
 * number is `plan.chain.order`.
 *
 * @returns maps: atom k lies on atom map[k]
 */
export function exchangesOf(plan: SymmetryPlan): Int32Array[] {
  const { n, levels } = plan;
  let maps: Int32Array[] = [Int32Array.from({ length: n }, (_, k) => k)];
  for (const { images, permutations } of levels) {
    const longer: Int32Array[] = [];
    for (const map of maps) {
      for (let i = 0; i < images; i++) {
        longer.push(Int32Array.from({ length: n }, (_, k) => map[permutations[i * n + k]!]!));
      }
    }
    maps = longer;
  }
  return maps;
}
