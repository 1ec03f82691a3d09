import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  alkane,
  alkaneBonds,
  motions,
  moved,
  placed,
  pointSets,
  type Vector,
} from "../../../tests/factories/geometry.ts";
import { c60, chain, cubane, plainGraph, ring, withHydrogens } from "../../../tests/factories/graphs.ts";
import { everyMapping, type Points, pack } from "../../../tests/factories/yardstick.ts";
import { automorphismChain } from "../chem/automorphisms.ts";
import { type Graph, makeGraph } from "../structure.ts";
import { makePlan } from "./plan.ts";
import { writeShape } from "./shape.ts";
import { superpose } from "./superpose.ts";
import { SymmetryNumber } from "./symmetry-number.ts";

function symmetryNumber(graph: Graph, points: Points, nodeLimit?: number): number | null {
  const plan = makePlan(graph, "all");
  const shape = new Float64Array(plan.shapeLength);
  writeShape(plan, pack(points), 0, shape, 0);
  return new SymmetryNumber(plan, nodeLimit).count(shape, 0);
}

const methane = withHydrogens("C", []);
const tetrahedral = [
  [0, 0, 0],
  [1, 1, 1],
  [1, -1, -1],
  [-1, 1, -1],
  [-1, -1, 1],
].map((p) => p.map((v) => 0.63 * v));
const benzene = withHydrogens("CCCCCC", ring(6), [
  [0, 1],
  [2, 3],
  [4, 5],
]);
const hexagon = [1.39, 2.48].flatMap((r) =>
  [0, 1, 2, 3, 4, 5].map((k) => [r * Math.cos((k * Math.PI) / 3), r * Math.sin((k * Math.PI) / 3), 0]),
);
const cube = [0.785, 1.41].flatMap((r) =>
  Array.from({ length: 8 }, (_, a) => [1, 2, 4].map((bit) => (a & bit ? r : -r))),
);
const ethane = withHydrogens("CC", chain(2));
const ethaneAt = (turn: number): Vector[] => {
  const [a, b]: [Vector, Vector] = [
    [0, 0, 0],
    [1.53, 0, 0],
  ];
  const first = [0, 120, 240].map((t) => placed([0.5, 1, 0], b, a, 1.09, 111.2, t));
  return [a, b, ...first, ...[60, 180, 300].map((t) => placed(first[0]!, a, b, 1.09, 111.2, t + turn))];
};
const tertButanol = withHydrogens("OCCCC", [
  [0, 1],
  [1, 2],
  [1, 3],
  [1, 4],
]);
const xylene = withHydrogens(
  "CCCCCCCC",
  [...ring(6), [0, 6], [3, 7]],
  [
    [0, 1],
    [2, 3],
    [4, 5],
  ],
);
const alkaneGraph = (carbons: number) =>
  makeGraph(
    Uint8Array.from({ length: 3 * carbons + 2 }, (_, a) => (a < carbons ? 6 : 1)),
    alkaneBonds(carbons).flat(),
  );

describe("symmetry number", () => {
  // Orders of the rotational subgroups of the point groups: T 12, D6 12, O 24, D3 6, C2 2.
  it.each([
    ["methane", methane, tetrahedral, 12],
    ["benzene", benzene, hexagon, 12],
    ["cubane", cubane(), cube, 24],
    ["ethane, staggered", ethane, ethaneAt(0), 6],
    ["ethane, eclipsed", ethane, ethaneAt(60), 6],
    ["ethane, half-way (D3)", ethane, ethaneAt(30), 6],
    [
      "carbon dioxide",
      plainGraph("OCO", chain(3)),
      [
        [-1.16, 0, 0],
        [0, 0, 0],
        [1.16, 0, 0],
      ],
      2,
    ],
    [
      "hydrogen",
      plainGraph("HH", chain(2)),
      [
        [0, 0, 0],
        [0.74, 0, 0],
      ],
      2,
    ],
    [
      "water",
      plainGraph("HOH", chain(3)),
      [
        [0.76, 0.59, 0],
        [0, 0, 0],
        [-0.76, 0.59, 0],
      ],
      2,
    ],
    ["argon", makeGraph(Uint8Array.of(18), []), [[1, 2, 3]], 1],
    ["butane, anti", alkaneGraph(4), alkane(4, [180]), 2],
    ["butane, gauche", alkaneGraph(4), alkane(4, [65]), 2],
    ["pentane, trans trans", alkaneGraph(5), alkane(5, [180, 180]), 2],
    ["pentane, trans gauche", alkaneGraph(5), alkane(5, [180, 65]), 1],
    ["pentane, gauche gauche", alkaneGraph(5), alkane(5, [65, 65]), 2],
    ["hexane, g+ t g- (inversion centre, no axis)", alkaneGraph(6), alkane(6, [65, 180, -65]), 1],
  ] as [string, Graph, number[][], number][])("%s", (_name, graph, points, expected) => {
    expect(symmetryNumber(graph, points)).toBe(expected);
  });

  it("of a ball of 60 carbons is 60", () => {
    // Corners of the truncated icosahedron: one third along each edge of the icosahedron.
    const graph = c60();
    expect(symmetryNumber(graph, c60Points())).toBe(60);
  });

  it("stands small distortions and does not change by motion", () => {
    fc.assert(
      fc.property(
        motions,
        fc.array(fc.integer({ min: -30, max: 30 }), { minLength: 48, maxLength: 48 }),
        (motion, noise) => {
          const shaken = cube.map((p, a) => p.map((v, k) => v + noise[3 * a + k]! / 1000));
          expect(symmetryNumber(cubane(), moved(shaken, motion))).toBe(24);
        },
      ),
      { seed: 20271, numRuns: 30 },
    );
  });

  it("falls where a distortion is real", () => {
    // Stretched along z: D4 instead of O.
    expect(
      symmetryNumber(
        cubane(),
        cube.map(([x, y, z]) => [x!, y!, 1.4 * z!]),
      ),
    ).toBe(8);
  });

  // Some atoms drawn together, so that exchanges come near to what counts; brute force over all of them.
  it.each([
    ["tert-butanol (1296)", tertButanol, 8],
    ["p-xylene (144)", xylene, 30],
    ["butane (288)", alkaneGraph(4), 20],
  ] as [string, Graph, number][])("counts what brute force counts: %s", (_name, graph, numRuns) => {
    const n = graph.elements.length;
    const every = Int32Array.from({ length: n }, (_, a) => a);
    const maps = [...everyMapping(automorphismChain(graph), every)];
    fc.assert(
      fc.property(pointSets(n), fc.nat(), fc.constantFrom(0.02, 0.05, 0.1, 0.2), (points, which, share) => {
        const map = maps[which % maps.length]!;
        const near = points.map((p, a) => p.map((v, k) => (1 - share) * points[map[a]!]![k]! + share * v));
        const x = pack(near);
        let expected = 0;
        let close = false;
        for (const one of maps) {
          const image = one.map((a) => a);
          const { positions, rmsd } = superpose(x, x, { permutation: image });
          let reach = 0;
          for (let a = 0; a < n; a++) {
            const move = [0, 1, 2].map((k) => positions[3 * image[a]! + k]! - x[3 * a + k]!);
            reach = Math.max(reach, Math.hypot(...move));
          }
          close ||= Math.abs(rmsd - 0.1) < 1e-7 || Math.abs(reach - 0.5) < 1e-7;
          if (rmsd <= 0.1 && reach <= 0.5) expected += 1;
        }
        fc.pre(!close);
        expect(symmetryNumber(graph, near)).toBe(expected);
      }),
      { seed: 20272, numRuns },
    );
  });

  it("does not count two hydrogens of a large molecule changing places, whatever the mean says", () => {
    // 662 atoms: such a swap alone is an RMSD of 1.78 sqrt(2/662) = 0.098 Å.
    const torsions = Array.from({ length: 217 }, (_, k) => [180, 65, 180, -65, 180, 180, 65][k % 7]!);
    expect(symmetryNumber(alkaneGraph(220), alkane(220, torsions))).toBe(1);
  });

  it("does not count an atom that ends more than 0.5 Å from its place, though no distance changes by 1.0 Å", () => {
    // Two hydrogens of one CH2 drawn together to 0.8 Å: exchanged, each lies 0.8 Å off, an RMSD of 0.092 Å.
    const carbons = 50;
    const torsions = Array.from({ length: 47 }, (_, k) => [180, 65, 180, -65, 180, 180, 65][k % 7]!);
    const points = alkane(carbons, torsions);
    const [h, i] = [carbons + 3 + 2 * 20, carbons + 4 + 2 * 20];
    const drawn = points.map((p, a) => {
      if (a !== h && a !== i) return p;
      const other = points[a === h ? i : h]!;
      const between = Math.hypot(...p.map((v, k) => v - other[k]!));
      return p.map((v, k) => (v + other[k]!) / 2 + (0.4 * (v - other[k]!)) / between);
    });
    expect(symmetryNumber(alkaneGraph(carbons), drawn)).toBe(1);
    const closer = points.map((p, a) =>
      a === h || a === i ? drawn[h]!.map((v, k) => (v + drawn[i]![k]!) / 2) : p,
    );
    expect(symmetryNumber(alkaneGraph(carbons), closer)).toBe(2);
  });

  it("is null where the work bound is met or not all exchanges are known", () => {
    expect(symmetryNumber(cubane(), cube, 10)).toBeNull();
    const plan = makePlan(cubane(), "all", { workLimit: 10 });
    expect(new SymmetryNumber(plan).count(new Float64Array(plan.shapeLength), 0)).toBeNull();
  });
});

function c60Points(): number[][] {
  const golden = (1 + Math.sqrt(5)) / 2;
  const corners: number[][] = [];
  for (const a of [-1, 1]) {
    for (const b of [-golden, golden]) corners.push([0, a, b], [a, b, 0], [b, 0, a]);
  }
  const near = (p: number[], q: number[]) =>
    Math.abs(p.reduce((s, v, k) => s + (v - q[k]!) ** 2, 0) - 4) < 1e-9;
  return corners.flatMap((p) =>
    corners.filter((q) => near(p, q)).map((q) => p.map((v, k) => 1.43 * 1.5 * (v + (q[k]! - v) / 3))),
  );
}
