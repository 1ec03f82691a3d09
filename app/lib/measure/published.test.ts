import { existsSync, readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { distance, torsion } from "./geometry.ts";

/**
 * Published alkane conformers, Gruzman et al., J. Phys. Chem. A 2009, 113, 11974: each name spells its C-C-C-C
 * torsions, t near 180°, g near 60°, x near 95°, p or m after a letter for the sign (common to a pair of mirror images).
 * The geometries are read beside the checkout and not copied.
 */
const FOLDER = new URL("../../../../shared/reference/alkane-conformers/", import.meta.url);
const CLASSES = { t: [170, 180], g: [52, 75], x: [85, 105] } as const;

describe.skipIf(!existsSync(FOLDER))("torsions of published alkane conformers", () => {
  it.each(["butane", "pentane", "hexane"])("spell the names of %s", (molecule) => {
    for (const { name, torsions } of conformers(molecule)) {
      const letters = [...name.toLowerCase().matchAll(/([tgx])([pm]?)/g)];
      expect(letters).toHaveLength(torsions.length);
      const forwards = fits(letters, torsions);
      expect(forwards || fits(letters, [...torsions].reverse()), `${name}: ${torsions.join(", ")}`).toBe(
        true,
      );
    }
  });
});

function fits(letters: RegExpMatchArray[], torsions: number[]): boolean {
  const sized = letters.every(([, letter], k) => {
    const [low, high] = CLASSES[letter as keyof typeof CLASSES];
    const size = Math.abs(torsions[k]!);
    return size >= low && size <= high;
  });
  const hands = letters.flatMap(([, letter, sign], k) =>
    sign && letter !== "t" ? [Math.sign(torsions[k]!) * (sign === "p" ? 1 : -1)] : [],
  );
  return sized && new Set(hands).size <= 1;
}

function conformers(molecule: string): { name: string; torsions: number[] }[] {
  const lines = readFileSync(new URL(`${molecule}.published.xyz`, FOLDER), "utf8")
    .trim()
    .split("\n");
  const found: { name: string; torsions: number[] }[] = [];
  for (let at = 0; at < lines.length; ) {
    const count = Number(lines[at]);
    const name = lines[at + 1]!.split(" ")[0]!.slice(2);
    const carbons = lines
      .slice(at + 2, at + 2 + count)
      .map((line) => line.trim().split(/\s+/))
      .filter((words) => words[0] === "C")
      .flatMap((words) => words.slice(1, 4).map(Number));
    const chain = chainOf(carbons);
    const torsions = chain
      .slice(3)
      .map((l, k) => torsion(carbons, chain[k]!, chain[k + 1]!, chain[k + 2]!, l) ?? Number.NaN);
    found.push({ name, torsions });
    at += count + 2;
  }
  return found;
}

/** Carbons from one end to the other; C-C bonds are shorter than 1.7 Å. */
function chainOf(carbons: number[]): number[] {
  const all = Array.from({ length: carbons.length / 3 }, (_, k) => k);
  const next = (atom: number) =>
    all.filter((other) => other !== atom && distance(carbons, atom, other) < 1.7);
  const chain = [all.find((atom) => next(atom).length === 1)!];
  for (;;) {
    const following = next(chain.at(-1)!).find((atom) => !chain.includes(atom));
    if (following === undefined) return chain;
    chain.push(following);
  }
}
