import { symbolOf } from "./elements.ts";

/**
 * Molecular formula in Hill order: carbon, hydrogen, then the rest by symbol; all by symbol where there is no carbon
 * (J. Am. Chem. Soc. 1900, 22, 478, from memory). Isotopes stand apart as `[13C]`, deuterium and tritium as `D` and
 * `T`, each directly after its element. Dummies (atomic number 0) are left out.
 *
 * @param isotopes mass number per atom, 0 where none is given
 * @example hillFormula([8, 6, 1, 1, 1, 1]) // "CH4O"
 */
export function hillFormula(elements: ArrayLike<number>, isotopes?: ArrayLike<number>): string {
  const counts = new Map<number, number>();
  for (let a = 0; a < elements.length; a++) {
    if (elements[a] === 0) continue;
    const key = elements[a]! * 1000 + (isotopes?.[a] ?? 0);
    counts.set(key, (counts.get(key) ?? 0) + 1);
  }
  const hasCarbon = [...counts.keys()].some((key) => Math.floor(key / 1000) === 6);
  const rank = (key: number): string => {
    const z = Math.floor(key / 1000);
    if (hasCarbon && z === 6) return "0";
    if (hasCarbon && z === 1) return "1";
    return `2${symbolOf(z)}`;
  };
  return [...counts]
    .sort(([x], [y]) => (rank(x) < rank(y) ? -1 : rank(x) > rank(y) ? 1 : x - y))
    .map(([key, count]) => `${symbolWithMass(key)}${count > 1 ? count : ""}`)
    .join("");
}

function symbolWithMass(key: number): string {
  const z = Math.floor(key / 1000);
  const mass = key % 1000;
  if (mass === 0) return symbolOf(z);
  if (z === 1 && mass === 2) return "D";
  if (z === 1 && mass === 3) return "T";
  return `[${mass}${symbolOf(z)}]`;
}
