import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { c4Skeleton, motions, moved, pointSets } from "../../../tests/factories/geometry.ts";
import { kabschRmsd, mirrored, type Points, pack } from "../../../tests/factories/yardstick.ts";
import { alignedRmsd, centreInto, covarianceInto, largestRoot, rootBelow, rotationInto } from "./kernel.ts";

const all = (n: number) => Int32Array.from({ length: n }, (_, k) => k);

function prepared(points: Points, weights?: readonly number[]) {
  const target = new Float64Array(3 * points.length);
  const e = centreInto(pack(points), 0, all(points.length), target, 0, weights);
  return { target, e };
}

function rmsd(x: Points, y: Points, options: { hand?: 1 | -1; weights?: readonly number[] } = {}): number {
  const a = prepared(x, options.weights);
  const b = prepared(y, options.weights);
  const total = options.weights ? options.weights.reduce((s, w) => s + w, 0) : x.length;
  return alignedRmsd(a.target, 0, a.e, b.target, 0, b.e, x.length, null, total, options.hand ?? 1);
}

const either = (x: Points, y: Points) => Math.min(rmsd(x, y), rmsd(x, y, { hand: -1 }));

const line = (spacing: number) => [0, 1, 2].map((k) => [k * spacing, 0, 0]);
const triangle = (side: number) =>
  [0, 1, 2].map((k) => [
    (side * Math.cos(2.0943951023931953 * k)) / Math.sqrt(3),
    (side * Math.sin(2.0943951023931953 * k)) / Math.sqrt(3),
    0,
  ]);
const tetrahedron = [
  [1, 1, 1],
  [1, -1, -1],
  [-1, 1, -1],
  [-1, -1, 1],
];
const corner = [
  [0, 0, 0],
  [3, 0, 0],
  [0, 2, 0],
  [0, 0, 1],
];
const planar = [
  [0, 0, 0],
  [2, 0, 0],
  [2.5, 1, 0],
  [0, 3, 0],
];

describe("RMSD of two labelled sets", () => {
  // Values derived by two routes (singular values and quaternions), 1e-9 Å.
  it.each([
    [
      "two atoms at 1.0 and 1.2 Å",
      [
        [0, 0, 0],
        [1, 0, 0],
      ],
      [
        [0, 0, 0],
        [0, 1.2, 0],
      ],
      0.1,
      0.1,
    ],
    [
      "three on a line, spacing 1.0 and 1.3",
      line(1),
      line(1.3),
      0.3 * Math.sqrt(2 / 3),
      0.3 * Math.sqrt(2 / 3),
    ],
    ["triangles of side 1.0 and 1.3", triangle(1), triangle(1.3), 0.3 / Math.sqrt(3), 0.3 / Math.sqrt(3)],
    ["a tetrahedron with two corners exchanged", tetrahedron, [0, 1, 3, 2].map((k) => tetrahedron[k]!), 2, 0],
    ["three axes and their mirror image", corner, corner.map(([x, y, z]) => [x!, y!, -z!]), 0.671302391, 0],
    ["a planar figure and its mirror image", planar, planar.map(([x, y, z]) => [-x!, y!, z!]), 0, 0],
    ["one atom", [[1, 2, 3]], [[7, 8, 9]], 0, 0],
    [
      "all atoms at one point",
      [
        [1, 1, 1],
        [1, 1, 1],
      ],
      [
        [2, 2, 2],
        [2, 2, 2],
      ],
      0,
      0,
    ],
  ] as [string, number[][], number[][], number, number][])("%s", (_name, x, y, proper, mirror) => {
    expect(rmsd(x, y)).toBeCloseTo(proper, 9);
    expect(either(x, y)).toBeCloseTo(mirror, 9);
  });

  it.each([
    [[1, 1, 1], 0.451475967],
    [[1, 1, 3], 0.466577274],
    [[12, 12, 1], 0.193058446],
  ])("takes the weights %j", (weights, expected) => {
    const x = [
      [0, 0, 0],
      [1, 0, 0],
      [0, 1, 0],
    ];
    const y = [
      [0, 0, 0],
      [1, 0, 0],
      [0, 2, 0],
    ];
    expect(rmsd(x, y, { weights })).toBeCloseTo(expected, 9);
    expect(kabschRmsd(x, y, weights)).toBeCloseTo(expected, 9);
  });

  it("of no atoms is 0", () => expect(rmsd([], [])).toBe(0));

  it("tells butane skeletons apart", () => {
    const [anti, plus, minus] = [c4Skeleton(180), c4Skeleton(65), c4Skeleton(-65)];
    expect(rmsd(anti, plus)).toBeCloseTo(0.680768714, 9);
    expect(rmsd(anti, minus)).toBeCloseTo(0.680768714, 9);
    expect(rmsd(plus, minus)).toBeCloseTo(0.489577907, 9);
    expect(rmsd(plus, minus, { hand: -1 })).toBeCloseTo(0, 9);
    expect(rmsd(plus, [...plus].reverse())).toBeCloseTo(0, 9);
    expect([66, 70, 75, 85, 95].map((t) => rmsd(plus, c4Skeleton(t)).toFixed(6))).toEqual([
      "0.005716",
      "0.028783",
      "0.058026",
      "0.117623",
      "0.178263",
    ]);
  });

  it("agrees with Kabsch by singular values, both hands, any number of atoms", () => {
    const pairs = fc.integer({ min: 1, max: 12 }).chain((n) => fc.tuple(pointSets(n), pointSets(n)));
    fc.assert(
      fc.property(pairs, ([x, y]) => {
        expect(Math.abs(rmsd(x, y) - kabschRmsd(x, y))).toBeLessThan(1e-9);
        expect(Math.abs(rmsd(x, y, { hand: -1 }) - kabschRmsd(x, mirrored(y)))).toBeLessThan(1e-9);
      }),
      { seed: 20253, numRuns: 500 },
    );
  });

  it("agrees with Kabsch on sets that are nearly or wholly linear or flat, where the root is nearly double", () => {
    const widths = fc.constantFrom(0, 1e-4, 1e-3, 0.05, 1);
    fc.assert(
      fc.property(pointSets(6), pointSets(6), widths, widths, motions, (x, y, wy, wz, motion) => {
        const squeezed = x.map(([a, b, c]) => [a!, wy * b!, wz * c!]);
        const other = moved(
          y.map(([a, b, c]) => [a!, wy * b!, wz * c!]),
          motion,
        );
        expect(Math.abs(rmsd(squeezed, other) - kabschRmsd(squeezed, other))).toBeLessThan(1e-9);
      }),
      { seed: 20254, numRuns: 500 },
    );
  });

  it("is 0 after any motion, a shift by 1000 Å too, and exactly 0 for the same numbers", () => {
    fc.assert(
      fc.property(pointSets(9), motions, (x, motion) => {
        expect(rmsd(x, moved(x, { ...motion, shift: [1000, -1000, 1000] }))).toBeLessThan(1e-9);
        expect(rmsd(x, x)).toBe(0);
      }),
      { seed: 20255, numRuns: 200 },
    );
  });

  it("keeps noise of 1e-7 Å, which a difference of sums would lose", () => {
    let state = 12345;
    const noise = () => {
      state = (Math.imul(state, 1103515245) + 12345) & 0x7fffffff;
      return state / 0x7fffffff - 0.5;
    };
    const x = Array.from({ length: 50 }, () => [10 * noise(), 10 * noise(), 10 * noise()]);
    const y = x.map((p) => p.map((v) => v + 1e-7 * Math.sqrt(12 / 3) * noise()));
    const direct = Math.sqrt(
      x.reduce((s, p, k) => s + p.reduce((t, v, i) => t + (v - y[k]![i]!) ** 2, 0), 0) / 50,
    );
    expect(direct).toBeGreaterThan(0.8e-7);
    expect(rmsd(x, y)).toBeGreaterThan(0.85 * direct);
    expect(rmsd(x, y)).toBeLessThanOrEqual(direct);
  });

  it("to the own mirror image with the same labels is 2 sqrt(L/N), L the least eigenvalue of sum r r^T", () => {
    // Axes along x, y, z, so that the eigenvalues stand on the diagonal: 2 a^2 each.
    const x = [
      [3, 0, 0],
      [-3, 0, 0],
      [0, 2, 0],
      [0, -2, 0],
      [0, 0, 1],
      [0, 0, -1],
    ];
    expect(rmsd(x, x, { hand: -1 })).toBeCloseTo(2 * Math.sqrt(2 / 6), 9);
  });

  it("is symmetric and obeys the triangle inequality", () => {
    fc.assert(
      fc.property(pointSets(5), pointSets(5), pointSets(5), (x, y, z) => {
        expect(Math.abs(rmsd(x, y) - rmsd(y, x))).toBeLessThan(1e-9);
        expect(rmsd(x, z)).toBeLessThanOrEqual(rmsd(x, y) + rmsd(y, z) + 1e-9);
        expect(Math.abs(rmsd(mirrored(x), mirrored(y)) - rmsd(x, y))).toBeLessThan(1e-9);
      }),
      { seed: 20256, numRuns: 200 },
    );
  });
});

describe("decision without the root", () => {
  it("never says below where the root is not, and says it a little above the root", () => {
    const m = new Float64Array(9);
    const squeezes = fc.constantFrom(0, 1e-6, 0.01, 1);
    fc.assert(
      fc.property(
        pointSets(3),
        squeezes,
        fc.double({ min: 1e-9, max: 0.5, noNaN: true }),
        (rows, s, step) => {
          m.set(rows.flat().map((v, k) => (k % 3 === 2 ? s * v : v)));
          const root = largestRoot(m, 0);
          if (root < 1e-3) return;
          expect(rootBelow(m, 0, root * (1 - step))).toBe(false);
          expect(rootBelow(m, 0, root * (1 - 1e-15))).toBe(false);
          // Near a double root P grows with the square of the distance: the margin shows later.
          expect(rootBelow(m, 0, root * (1 + Math.max(step, 1e-5)))).toBe(true);
          m.set(m.map((v) => -v));
          const other = largestRoot(m, 0);
          expect(rootBelow(m, 0, other * (1 + 1e-5) + 1e-9)).toBe(true);
          expect(rootBelow(m, 0, other * (1 - 1e-9))).toBe(false);
        },
      ),
      { seed: 20257, numRuns: 1000 },
    );
  });

  it("never rejects at or below zero", () => {
    expect(rootBelow(new Float64Array(9), 0, 0)).toBe(false);
    expect(rootBelow(new Float64Array(9), 0, -1)).toBe(false);
    expect(rootBelow(new Float64Array(9), 0, 1)).toBe(true);
  });
});

describe("best rotation", () => {
  it("is proper and brings x onto y", () => {
    const r = new Float64Array(9);
    const m = new Float64Array(9);
    fc.assert(
      fc.property(pointSets(5), motions, (x, motion) => {
        const y = moved(x, motion);
        const a = prepared(x);
        const b = prepared(y);
        covarianceInto(a.target, 0, b.target, 0, 5, null, m, 0);
        rotationInto(m, 0, r);
        const [p, q, s] = [r.slice(0, 3), r.slice(3, 6), r.slice(6, 9)] as [
          Float64Array,
          Float64Array,
          Float64Array,
        ];
        const det =
          p[0]! * (q[1]! * s[2]! - q[2]! * s[1]!) -
          p[1]! * (q[0]! * s[2]! - q[2]! * s[0]!) +
          p[2]! * (q[0]! * s[1]! - q[1]! * s[0]!);
        expect(det).toBeCloseTo(1, 12);
        for (let k = 0; k < 5; k++) {
          const from = a.target.subarray(3 * k, 3 * k + 3);
          [p, q, s].forEach((row, i) => {
            const value = row[0]! * from[0]! + row[1]! * from[1]! + row[2]! * from[2]!;
            expect(value).toBeCloseTo(b.target[3 * k + i]!, 9);
          });
        }
      }),
      { seed: 20258, numRuns: 100 },
    );
  });
});
