import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { c4Skeleton, motions, moved, pointSets } from "../../../tests/factories/geometry.ts";
import { chain, withHydrogens } from "../../../tests/factories/graphs.ts";
import { kabschRmsd, mirrored, type Points, pack } from "../../../tests/factories/yardstick.ts";
import { makePlan } from "./plan.ts";
import { rmsdTo } from "./rmsd-to.ts";
import { superpose } from "./superpose.ts";

const distance = (a: Float64Array, b: Float64Array) =>
  Math.sqrt(a.reduce((s, v, k) => s + (v - b[k]!) ** 2, 0) / (a.length / 3));

describe("superpose", () => {
  it("lays a moved copy back onto itself, all atoms by a part of them", () => {
    fc.assert(
      fc.property(pointSets(8), motions, (x, motion) => {
        const moving = pack(moved(x, motion));
        const result = superpose(pack(x), moving, { atoms: Int32Array.of(0, 2, 3, 5, 7) });
        expect(result.rmsd).toBeLessThan(1e-9);
        // Half-turned points all on one line leave the rotation about it free.
        if (kabschRmsd(x, mirrored(x)) > 0.1) expect(distance(result.positions, pack(x))).toBeLessThan(1e-6);
      }),
      { seed: 20281, numRuns: 100 },
    );
  });

  it("reaches the RMSD it states, with weights, permutation and mirror image", () => {
    const permutation = Int32Array.of(1, 2, 0, 3, 5, 4);
    const weights = [1, 2, 3, 1, 12, 1];
    fc.assert(
      fc.property(pointSets(6), pointSets(6), fc.boolean(), (x, y, mirror) => {
        const result = superpose(pack(x), pack(y), { permutation, weights, mirror });
        const partners: Points = [...permutation].map((a) => y[a]!);
        expect(result.rmsd).toBeCloseTo(kabschRmsd(x, mirror ? mirrored(partners) : partners, weights), 9);
        const sum = x.reduce(
          (s, p, a) =>
            s +
            weights[a]! * p.reduce((t, v, k) => t + (v - result.positions[3 * permutation[a]! + k]!) ** 2, 0),
          0,
        );
        expect(Math.sqrt(sum / 20)).toBeCloseTo(result.rmsd, 9);
        // Distances inside the moved frame are those of the frame: nothing is bent.
        const inside = (p: Points) => Math.hypot(...p[0]!.map((v, k) => v - p[4]![k]!));
        const after = [0, 4].map((a) => [...result.positions.slice(3 * a, 3 * a + 3)]);
        expect(Math.hypot(...after[0]!.map((v, k) => v - after[1]![k]!))).toBeCloseTo(inside(y), 9);
      }),
      { seed: 20282, numRuns: 100 },
    );
  });

  it("takes one atom and points on a line, and refuses unlike frames and no atoms", () => {
    const [a, b] = [pack([[1, 1, 1]]), pack([[4, 5, 6]])];
    expect(superpose(a, b)).toEqual({ positions: a, rmsd: 0 });
    const line = superpose(
      pack([
        [0, 0, 0],
        [1, 0, 0],
        [2, 0, 0],
      ]),
      pack([
        [0, 0, 5],
        [0, 0, 6],
        [0, 0, 7],
      ]),
    );
    expect(
      distance(
        line.positions,
        pack([
          [0, 0, 0],
          [1, 0, 0],
          [2, 0, 0],
        ]),
      ),
    ).toBeLessThan(1e-12);
    expect(() =>
      superpose(
        a,
        pack([
          [0, 0, 0],
          [1, 0, 0],
        ]),
      ),
    ).toThrow(RangeError);
    expect(() => superpose(a, b, { atoms: new Int32Array(0) })).toThrow(RangeError);
  });
});

describe("RMSD of many frames to one", () => {
  const butane = withHydrogens("CCCC", chain(4));
  const frame = (torsion: number) => [...c4Skeleton(torsion), ...Array.from({ length: 10 }, () => [0, 0, 0])];
  const block = { atoms: 14, count: 3, positions: pack([180, 65, -65].flatMap(frame)) };
  const plan = makePlan(butane, "heavy");

  it("gives each frame its own, mirror images as asked", () => {
    const proper = rmsdTo(plan, block, 1);
    [0.680768714, 0, 0.489577907].forEach((value, k) => {
      expect(proper.rmsd[k]).toBeCloseTo(value, 9);
    });
    expect([...proper.mirror, ...proper.exact]).toEqual([0, 0, 0, 1, 1, 1]);
    const either = rmsdTo(plan, block, 1, { mirror: true, rows: Int32Array.of(2, 1) });
    expect(either.rmsd[0]).toBeLessThan(1e-9);
    expect([...either.mirror]).toEqual([1, 0]);
  });

  it("refuses a frame that is not there", () => {
    expect(() => rmsdTo(plan, block, 3)).toThrow(RangeError);
  });
});
