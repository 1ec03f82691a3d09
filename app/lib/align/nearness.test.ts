import { describe, expect, it } from "vitest";
import { graphOf, readXyz } from "../../../tests/factories/read-xyz.ts";
import type { AtomSet } from "../structure.ts";
import { NearnessWork } from "./nearness.ts";
import { makePlan } from "./plan.ts";
import { writeShape } from "./shape.ts";
import { SymmetricRmsd } from "./symmetric-rmsd.ts";

const frames = readXyz("fixtures/reference/ensembles/ac-ala-nhme.xyz");
const graph = graphOf(frames);

/** All pairs, one by one. */
function everyPair(rows: readonly number[], atoms: AtomSet, mirror: boolean) {
  const plan = makePlan(graph, atoms);
  const comparer = new SymmetricRmsd(plan);
  const shapes = rows.map((row) => {
    const shape = new Float64Array(plan.shapeLength);
    writeShape(plan, frames.block.positions, 3 * frames.block.atoms * row, shape, 0);
    return shape;
  });
  const pairs: { a: number; b: number; rmsd: number }[] = [];
  shapes.forEach((x, a) => {
    shapes.slice(a + 1).forEach((y, k) => {
      pairs.push({ a, b: a + 1 + k, rmsd: comparer.minimum(x, 0, y, 0, mirror).rmsd });
    });
  });
  return { plan, pairs };
}

describe.each([
  ["heavy", true],
  ["heavy+polarH", false],
  ["all", true],
] as const)("nearness of %s atoms, mirror images %s", (atoms, mirror) => {
  const rows = Array.from({ length: 90 }, (_, k) => 3 * k + 1);
  const { plan, pairs } = everyPair(rows, atoms, mirror);
  const tolerance = 0.2;
  const work = new NearnessWork({
    plan,
    block: frames.block,
    rows: Int32Array.from(rows),
    mirror,
    tolerance,
    most: 5,
  });
  while (work.next()) {}
  const { result } = work;

  it("finds the nearest of every conformer as comparing all pairs does", () => {
    for (let k = 0; k < rows.length; k++) {
      const own = pairs.filter(({ a, b }) => a === k || b === k);
      const least = Math.min(...own.map(({ rmsd }) => rmsd));
      expect(result.rmsd[k]).toBeCloseTo(least, 9);
      expect(result.exact[k]).toBe(1);
    }
  });

  it("lists the pairs just above the tolerance and counts those within", () => {
    const above = pairs.filter(({ rmsd }) => rmsd > tolerance).sort((p, q) => p.rmsd - q.rmsd);
    expect(result.over.map(({ a, b }) => [a, b])).toEqual(above.slice(0, 5).map(({ a, b }) => [a, b]));
    const within = pairs.filter(({ rmsd }) => rmsd <= tolerance);
    expect(result.within).toBe(within.length);
    expect(result.farthestWithin?.rmsd ?? 0).toBeCloseTo(Math.max(0, ...within.map(({ rmsd }) => rmsd)), 9);
  });
});

it("has nothing near in a set of one", () => {
  const plan = makePlan(graph, "heavy");
  const rows = Int32Array.of(0);
  const work = new NearnessWork({ plan, block: frames.block, rows, mirror: true, tolerance: 1, most: 5 });
  expect(work.next()).toBe(false);
  expect([work.result.nearest[0], work.result.rmsd[0]]).toEqual([-1, Number.POSITIVE_INFINITY]);
  const outside = {
    plan,
    block: frames.block,
    rows: Int32Array.of(9_999),
    mirror: true,
    tolerance: 1,
    most: 5,
  };
  expect(() => new NearnessWork(outside)).toThrow(RangeError);
});
