import { describe, expect, test } from "vitest";
import { makeGraph } from "../structure.ts";
import { ConformerDistances, laidOver } from "./distances.ts";

// Hydrogen peroxide, HOOH, 1.45 and 0.96 Å, angles of 100°; turned by its torsion. Two equivalent ends.
const graph = makeGraph(Uint8Array.of(1, 8, 8, 1), [0, 1, 1, 2, 2, 3]);
const ALL = { atoms: "all", symmetry: true, mirror: true } as const;

function peroxide(degrees: number): Float64Array {
  const t = (degrees * Math.PI) / 180;
  const out = 0.96 * Math.sin((100 * Math.PI) / 180);
  const along = 0.96 * Math.cos((100 * Math.PI) / 180);
  return Float64Array.of(
    along,
    out,
    0,
    0,
    0,
    0,
    1.45,
    0,
    0,
    1.45 - along,
    out * Math.cos(t),
    out * Math.sin(t),
  );
}

function set(torsions: number[], options: { atoms: "all"; symmetry: boolean; mirror: boolean } = ALL) {
  const distances = new ConformerDistances(graph, options);
  for (const t of torsions) distances.add(peroxide(t));
  return distances;
}

describe("distances of conformers", () => {
  test("a mirror image is near only where images count as one", () => {
    expect(set([110, -110]).between(0, 1)).toMatchObject({ mirror: true, exact: true });
    expect(set([110, -110]).between(0, 1).rmsd).toBeLessThan(1e-6);
    expect(set([110, -110], { ...ALL, mirror: false }).between(0, 1).rmsd).toBeGreaterThan(0.3);
  });

  test("the exchange lays one over the other, atom by atom", () => {
    // The same molecule numbered from its other end: without the exchange it would look far.
    const distances = new ConformerDistances(graph, ALL);
    const a = peroxide(110);
    const b = laidOver(a, [3, 2, 1, 0], true);
    distances.add(a);
    distances.add(b);
    const { distance, permutation } = distances.exchange(0, 1);
    expect(distance.rmsd).toBeLessThan(1e-6);
    const back = laidOver(b, permutation, distance.mirror);
    const spread = (p: Float64Array, i: number, j: number) =>
      Math.hypot(p[3 * i]! - p[3 * j]!, p[3 * i + 1]! - p[3 * j + 1]!, p[3 * i + 2]! - p[3 * j + 2]!);
    for (let i = 0; i < 4; i++)
      for (let j = 0; j < i; j++) expect(spread(back, i, j)).toBeCloseTo(spread(a, i, j), 9);
  });

  test("a conformer that was not added is refused", () => {
    expect(() => set([0]).between(0, 1)).toThrow(RangeError);
  });
});
