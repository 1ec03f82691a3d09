import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  alkane,
  alkaneBonds,
  c4Skeleton,
  motions,
  moved,
  placed,
  pointSets,
  type Vector,
} from "../../../tests/factories/geometry.ts";
import {
  adamantane,
  chain,
  cubane,
  plainGraph,
  ring,
  withHydrogens,
} from "../../../tests/factories/graphs.ts";
import {
  bruteForceRmsd,
  everyMapping,
  kabschRmsd,
  mirrored,
  type Points,
  pack,
} from "../../../tests/factories/yardstick.ts";
import { type AtomSet, type Graph, makeGraph, selectAtoms } from "../structure.ts";
import { CosetTree } from "./coset-tree.ts";
import { largestRoot } from "./kernel.ts";
import { LocalBound } from "./local-bound.ts";
import { makePlan, type SymmetryPlan } from "./plan.ts";
import { distancesExceed, writeShape } from "./shape.ts";
import { SymmetricRmsd } from "./symmetric-rmsd.ts";

function shapeOf(plan: SymmetryPlan, points: Points): Float64Array {
  const shape = new Float64Array(plan.shapeLength);
  writeShape(plan, pack(points), 0, shape, 0);
  return shape;
}

function compare(graph: Graph, atoms: AtomSet, x: Points, y: Points, mirror = false) {
  const plan = makePlan(graph, atoms);
  return new SymmetricRmsd(plan).minimum(shapeOf(plan, x), 0, shapeOf(plan, y), 0, mirror);
}

function brute(graph: Graph, atoms: AtomSet, x: Points, y: Points): number {
  const plan = makePlan(graph, atoms);
  const chosen = [...plan.atoms];
  return bruteForceRmsd(
    chosen.map((a) => x[a]!),
    chosen.map((a) => y[a]!),
    everyMapping(plan.chain, plan.atoms),
  );
}

/** Points with atom p[a] where atom a was, moved and shaken. */
const relabel = (points: Points, p: ArrayLike<number>) => {
  const out: number[][] = points.map(() => []);
  points.forEach((point, a) => {
    out[p[a]!] = [...point];
  });
  return out;
};

const butane = withHydrogens("CCCC", chain(4));
const tertButanol = withHydrogens("OCCCC", [
  [0, 1],
  [1, 2],
  [1, 3],
  [1, 4],
]);
const neopentane = withHydrogens("CCCCC", [
  [0, 1],
  [0, 2],
  [0, 3],
  [0, 4],
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
const waters = plainGraph(
  "OHHOHHOHH",
  [0, 3, 6].flatMap(
    (o) =>
      [
        [o, o + 1],
        [o, o + 2],
      ] as [number, number][],
  ),
);

const CASES: [string, Graph, AtomSet, number][] = [
  ["butane, all atoms (288)", butane, "all", 12],
  ["tert-butanol, all atoms (1296)", tertButanol, "all", 4],
  ["p-xylene, all atoms (144)", xylene, "all", 30],
  ["neopentane, heavy atoms (24)", neopentane, "heavy", 60],
  ["cubane, all atoms (48)", cubane(), "all", 40],
  ["adamantane, heavy atoms (24)", adamantane(), "heavy", 60],
  ["three waters, all atoms (48)", waters, "all", 60],
];

describe("least RMSD over all exchanges", () => {
  it.each(CASES)("equals brute force for unlike pairs of %s", (_name, graph, atoms, numRuns) => {
    const n = graph.elements.length;
    fc.assert(
      fc.property(pointSets(n), pointSets(n), (x, y) => {
        const proper = brute(graph, atoms, x, y);
        const image = brute(graph, atoms, x, mirrored(y));
        const found = compare(graph, atoms, x, y);
        expect(found.exact).toBe(true);
        expect(Math.abs(found.rmsd - proper)).toBeLessThan(1e-9);
        const both = compare(graph, atoms, x, y, true);
        expect(Math.abs(both.rmsd - Math.min(proper, image))).toBeLessThan(1e-9);
        expect(both.mirror).toBe(image < proper);
      }),
      { seed: 20261, numRuns },
    );
  });

  it.each(CASES)("finds a relabelled, moved, shaken copy of %s", (_name, graph, atoms, numRuns) => {
    const n = graph.elements.length;
    const plan = makePlan(graph, atoms);
    const mappings = [
      ...everyMapping(
        makePlan(graph, "all").chain,
        Array.from({ length: n }, (_, a) => a),
      ),
    ];
    const comparer = new SymmetricRmsd(plan);
    fc.assert(
      fc.property(pointSets(n), fc.nat(), motions, pointSets(n), (x, which, motion, noise) => {
        const shaken = x.map((p, a) => p.map((v, k) => v + 0.01 * noise[a]![k]!));
        const y = moved(relabel(shaken, mappings[which % mappings.length]!), motion);
        const chosen = [...plan.atoms];
        const same = kabschRmsd(
          chosen.map((a) => x[a]!),
          chosen.map((a) => shaken[a]!),
        );
        const found = comparer.decide(shapeOf(plan, x), 0, shapeOf(plan, y), 0, same + 1e-9, false);
        expect(found).not.toBeNull();
        expect(found!.rmsd).toBeLessThanOrEqual(same + 1e-9);
        expect(found!.mirror).toBe(false);
        // The exchange it names gives that RMSD.
        const p = comparer.permutation();
        const named = kabschRmsd(
          chosen.map((a) => x[a]!),
          chosen.map((a) => y[p[a]!]!),
        );
        expect(Math.abs(named - found!.rmsd)).toBeLessThan(1e-9);
      }),
      { seed: 20262, numRuns },
    );
  });

  it("decides as the minimum does, at any tolerance", () => {
    const plan = makePlan(butane, "all");
    const comparer = new SymmetricRmsd(plan);
    fc.assert(
      fc.property(pointSets(14), pointSets(14), fc.boolean(), (x, y, mirror) => {
        const [a, b] = [shapeOf(plan, x), shapeOf(plan, y)];
        const least = comparer.minimum(a, 0, b, 0, mirror);
        const above = comparer.decide(a, 0, b, 0, least.rmsd, mirror);
        expect(above).toEqual(least);
        expect(comparer.decide(a, 0, b, 0, least.rmsd * (1 - 1e-9), mirror)).toBeNull();
        expect(comparer.lastWasCut).toBe(false);
      }),
      { seed: 20263, numRuns: 60 },
    );
  });

  it("is unchanged by motion and by allowed exchanges, symmetric, and obeys the triangle inequality", () => {
    const mappings = [
      ...everyMapping(
        makePlan(butane, "all").chain,
        Array.from({ length: 14 }, (_, a) => a),
      ),
    ];
    fc.assert(
      fc.property(
        pointSets(14),
        pointSets(14),
        pointSets(14),
        motions,
        fc.nat(),
        (x, y, z, motion, which) => {
          const xy = compare(butane, "all", x, y).rmsd;
          const other = moved(relabel(y, mappings[which % mappings.length]!), motion);
          expect(Math.abs(compare(butane, "all", x, other).rmsd - xy)).toBeLessThan(1e-9);
          expect(Math.abs(compare(butane, "all", y, x).rmsd - xy)).toBeLessThan(1e-9);
          expect(Math.abs(compare(butane, "all", mirrored(x), mirrored(y)).rmsd - xy)).toBeLessThan(1e-9);
          const around = compare(butane, "all", x, z).rmsd + compare(butane, "all", z, y).rmsd;
          expect(xy).toBeLessThanOrEqual(around + 1e-9);
        },
      ),
      { seed: 20264, numRuns: 40 },
    );
  });

  it("takes a chain with 18.9 million exchanges exactly", () => {
    // C20H42, all atoms: 2^18 for the CH2, 36 for the ends, 2 for their exchange.
    const graph = makeGraph(
      Uint8Array.from({ length: 62 }, (_, a) => (a < 20 ? 6 : 1)),
      alkaneBonds(20).flat(),
    );
    const plan = makePlan(graph, "all");
    expect(plan.chain.order).toBe(2 ** 18 * 72);
    const torsions = (k: number) =>
      Array.from({ length: 17 }, (_, i) => [180, 65, -65, 180, 170][(i * k + i) % 5]!);
    const [x, y] = [alkane(20, torsions(1)), alkane(20, torsions(2))];
    const comparer = new SymmetricRmsd(plan);
    const found = comparer.minimum(shapeOf(plan, x), 0, shapeOf(plan, y), 0);
    expect(found.exact).toBe(true);
    // No exchange of two hydrogens, nor two at once, improves on what it names.
    const p = [...comparer.permutation()];
    const swaps = Array.from({ length: 18 }, (_, k) => [23 + 2 * k, 24 + 2 * k] as const);
    const swapped = (q: number[], [a, b]: readonly [number, number]) =>
      q.map((v, i) => (i === a ? q[b]! : i === b ? q[a]! : v));
    const value = (q: number[]) =>
      kabschRmsd(
        x,
        q.map((a) => y[a]!),
      );
    expect(Math.abs(value(p) - found.rmsd)).toBeLessThan(1e-9);
    for (const one of swaps) {
      for (const other of swaps) {
        const q = one === other ? swapped(p, one) : swapped(swapped(p, one), other);
        expect(value(q)).toBeGreaterThanOrEqual(found.rmsd - 1e-9);
      }
    }
  });

  it("says upper bound where the work bound is met", () => {
    const plan = makePlan(tertButanol, "all");
    const points = (k: number) =>
      tertButanol.elements.reduce<number[][]>((list, _, a) => {
        list.push([Math.sin(k + 3 * a) * 3, Math.cos(k * a + 1) * 3, Math.sin(a * a + k) * 3]);
        return list;
      }, []);
    const [x, y] = [shapeOf(plan, points(1)), shapeOf(plan, points(2))];
    const full = new SymmetricRmsd(plan).minimum(x, 0, y, 0);
    const cut = new SymmetricRmsd(plan, 20);
    const bound = cut.minimum(x, 0, y, 0);
    expect(full.exact).toBe(true);
    expect(bound.exact).toBe(false);
    expect(bound.rmsd).toBeGreaterThanOrEqual(full.rmsd - 1e-12);
    expect(cut.lastWasCut).toBe(true);
    const unknown = makePlan(cubane(), "all", { workLimit: 10 });
    const same = shapeOf(
      unknown,
      Array.from({ length: 16 }, (_, a) => [a, a * a, Math.sin(a)]),
    );
    expect(new SymmetricRmsd(unknown).minimum(same, 0, same, 0)).toEqual({
      rmsd: 0,
      mirror: false,
      exact: false,
    });
  });

  it("handles one atom, two atoms and no exchange at all", () => {
    const argon = makeGraph(Uint8Array.of(18), []);
    expect(compare(argon, "all", [[1, 2, 3]], [[4, 5, 6]])).toEqual({ rmsd: 0, mirror: false, exact: true });
    const plan = makePlan(argon, "all");
    const shape = shapeOf(plan, [[1, 2, 3]]);
    expect(new SymmetricRmsd(plan).decide(shape, 0, shape, 0, 0, true)?.rmsd).toBe(0);
    const hydrogen = plainGraph("HH", chain(2));
    expect(
      compare(
        hydrogen,
        "heavy",
        [
          [0, 0, 0],
          [1, 0, 0],
        ],
        [
          [0, 0, 0],
          [0, 0, 1.2],
        ],
      ).rmsd,
    ).toBeCloseTo(0.1, 12);
    const ghost = makeGraph(Uint8Array.of(0, 0), []);
    expect(
      compare(
        ghost,
        "all",
        [
          [0, 0, 0],
          [1, 0, 0],
        ],
        [
          [0, 0, 0],
          [9, 0, 0],
        ],
      ).rmsd,
    ).toBe(0);
  });

  it("compares by index only where symmetry is switched off", () => {
    const plan = makePlan(butane, "heavy", { symmetry: false });
    const plus = [...c4Skeleton(65), ...Array.from({ length: 10 }, () => [0, 0, 0])];
    const turned = [...[...c4Skeleton(65)].reverse(), ...plus.slice(4)];
    const shape = (p: Points) => shapeOf(plan, p);
    const anti = [...c4Skeleton(180), ...plus.slice(4)];
    expect(new SymmetricRmsd(plan).minimum(shape(plus), 0, shape(anti), 0).rmsd).toBeCloseTo(0.680768714, 9);
    const skewed = plus.map((p, a) => (a === 0 ? [p[0]! + 1, p[1]!, p[2]!] : p));
    const back = [...skewed.slice(0, 4).reverse(), ...skewed.slice(4)];
    expect(new SymmetricRmsd(plan).minimum(shape(skewed), 0, shape(back), 0).rmsd).toBeGreaterThan(0.1);
    expect(compare(butane, "heavy", skewed, back).rmsd).toBeLessThan(1e-9);
    expect(turned).toHaveLength(14);
  });
});

describe("known pairs", () => {
  // Ethane of C-C 1.53, C-H 1.09 Å, C-C-H 111.2 degrees; values derived by two routes.
  const ethane = (turn: number): Vector[] => {
    const [a, b]: [Vector, Vector] = [
      [0, 0, 0],
      [1.53, 0, 0],
    ];
    const side: Vector = [0.5, 1, 0];
    const first = [0, 120, 240].map((t) => placed(side, b, a, 1.09, 111.2, t));
    const second = [0, 120, 240].map((t) => placed(first[0]!, a, b, 1.09, 111.2, t + 180 + turn));
    return [a, b, ...first, ...second];
  };
  const graph = withHydrogens("CC", chain(2));
  const fixed = (x: Points, y: Points) => {
    const plan = makePlan(graph, "all", { symmetry: false });
    return new SymmetricRmsd(plan).minimum(shapeOf(plan, x), 0, shapeOf(plan, y), 0).rmsd;
  };

  it("ethane with one methyl turned by 120 degrees is itself, with fixed labels it is not", () => {
    expect(fixed(ethane(0), ethane(120))).toBeCloseTo(0.880083545, 9);
    expect(compare(graph, "all", ethane(0), ethane(120)).rmsd).toBeLessThan(1e-9);
    expect(fixed(ethane(0), ethane(60))).toBeCloseTo(0.455564765, 9);
    expect(compare(graph, "all", ethane(0), ethane(60)).rmsd).toBeCloseTo(0.455564765, 9);
  });

  it("butane: gauche with reversed atom order is itself, its mirror image is not", () => {
    const heavy = (torsion: number) => [
      ...c4Skeleton(torsion),
      ...Array.from({ length: 10 }, () => [0, 0, 0]),
    ];
    const reversed = [...heavy(65).slice(0, 4).reverse(), ...heavy(65).slice(4)];
    expect(compare(butane, "heavy", heavy(65), reversed).rmsd).toBeLessThan(1e-9);
    expect(compare(butane, "heavy", heavy(65), heavy(-65)).rmsd).toBeCloseTo(0.489577907, 9);
    expect(compare(butane, "heavy", heavy(65), heavy(-65), true)).toMatchObject({
      mirror: true,
      exact: true,
    });
    const plan = makePlan(butane, "heavy");
    const comparer = new SymmetricRmsd(plan);
    expect(comparer.toOwnMirror(shapeOf(plan, heavy(65)), 0).rmsd).toBeCloseTo(0.489577907, 9);
    expect(comparer.toOwnMirror(shapeOf(plan, heavy(180)), 0).rmsd).toBeLessThan(1e-9);
  });

  it("carboxylate, CF3 and isopropyl groups are equivalent beyond hydrogens", () => {
    const acetate = plainGraph("CCOOHHH", [
      [0, 1],
      [1, 2],
      [1, 3],
      [0, 4],
      [0, 5],
      [0, 6],
    ]);
    const points = [
      [0, 0, 0],
      [1.5, 0, 0],
      [2.1, 1.1, 0.1],
      [2.1, -1.1, -0.2],
      [-0.4, 1, 0],
      [-0.4, -0.5, 0.9],
      [-0.4, -0.5, -0.9],
    ];
    expect(
      compare(
        acetate,
        "heavy",
        points,
        [0, 1, 3, 2, 4, 5, 6].map((a) => points[a]!),
      ).rmsd,
    ).toBeLessThan(1e-6);
    expect(
      compare(
        acetate,
        "all",
        points,
        [0, 1, 3, 2, 6, 5, 4].map((a) => points[a]!),
      ).rmsd,
    ).toBeLessThan(1e-6);
  });
});

describe("bounds", () => {
  it("from distances never reject a pair that lies within", () => {
    const plan = makePlan(butane, "all");
    const comparer = new SymmetricRmsd(plan);
    let rejected = 0;
    fc.assert(
      fc.property(pointSets(14), pointSets(14), fc.integer({ min: 1, max: 99 }), (x, noise, share) => {
        const y = x.map((p, a) => p.map((v, k) => v + 0.1 * noise[a]![k]!));
        const [a, b] = [shapeOf(plan, x), shapeOf(plan, y)];
        const least = comparer.minimum(a, 0, b, 0, true).rmsd;
        expect(distancesExceed(plan, a, 0, b, 0, least)).toBe(false);
        if (distancesExceed(plan, a, 0, b, 0, (least * share) / 100)) rejected += 1;
      }),
      { seed: 20265, numRuns: 200 },
    );
    expect(rejected).toBeGreaterThan(50);
  });

  it("of small groups under nearly one rotation never reject what can be reached", () => {
    // Decane: the last two CH2 and the two CH3 are still open, all hydrogens shaken.
    const graph = makeGraph(
      Uint8Array.from({ length: 32 }, (_, a) => (a < 10 ? 6 : 1)),
      alkaneBonds(10).flat(),
    );
    const plan = makePlan(graph, "all");
    const depth = plan.levels.length - 6;
    const open = { ...plan.chain, levels: plan.chain.levels.slice(depth) };
    const rest = [...everyMapping(open, plan.atoms)];
    expect(rest).toHaveLength(144);
    const tree = new CosetTree(plan);
    const local = new LocalBound(tree);
    let passed = 0;
    let rejected = 0;
    const torsions = fc.array(fc.integer({ min: -180, max: 180 }), { minLength: 7, maxLength: 7 });
    fc.assert(
      fc.property(torsions, torsions, pointSets(32), fc.boolean(), fc.nat(), (t, u, noise, mirror, path) => {
        const x = alkane(10, t).map((p, a) => p.map((v, k) => v + 0.08 * noise[a]![k]!));
        const y = alkane(
          10,
          t.map((angle, k) => angle + u[k]! / 6),
        );
        const [a, b] = [shapeOf(plan, x), shapeOf(plan, y)];
        const spread = a[3 * 32]! + b[3 * 32]!;
        tree.start(a, 0, b, 0, mirror ? -1 : 1);
        for (let i = 0; i < depth; i++) {
          tree.expand(i);
          tree.descend(i, (path >> i) % plan.levels[i]!.images);
        }
        const first = Int32Array.from(tree.mapAt(depth));
        const least = bruteForceRmsd(
          x,
          mirror ? mirrored(y) : y,
          rest.map((m) => m.map((image) => first[image]!)),
        );
        const reached = (spread - 32 * least * least) / 2;
        expect(local.hopeless(depth, reached * (1 - 1e-12), spread / 2)).toBe(false);
        expect(largestRoot(tree.m, 9 * depth) + tree.slack[depth]!).toBeGreaterThanOrEqual(reached - 1e-9);
        // And it is sharper than the plain one: it rejects much of what that lets pass.
        if (!tree.hopeless(depth, reached + 1)) {
          passed += 1;
          if (local.hopeless(depth, reached + 1, spread / 2)) rejected += 1;
        }
      }),
      { seed: 20266, numRuns: 60 },
    );
    expect(passed).toBeGreaterThan(20);
    expect(rejected).toBeGreaterThan(passed / 2);
  });
});

describe("bound of small groups, tightly", () => {
  it("holds at the very edge for any geometry of a CH3 and a CH2 on a small skeleton", () => {
    // A small skeleton holds the rotation badly: the bound has to allow for large turns.
    const graph = withHydrogens("CNCOF", chain(5));
    const plan = makePlan(graph, "all");
    const mappings = [...everyMapping(plan.chain, plan.atoms)];
    expect(mappings).toHaveLength(12);
    const tree = new CosetTree(plan);
    const local = new LocalBound(tree);
    const n = plan.n;
    let turned = 0;
    fc.assert(
      fc.property(pointSets(n), pointSets(n), fc.constantFrom(0, 0.1, 0.3, 1), (x, noise, share) => {
        const y = x.map((p, a) =>
          p.map((v, k) => (1 - share) * v + (share + (a > 4 ? 0.4 : 0)) * noise[a]![k]!),
        );
        const [a, b] = [shapeOf(plan, x), shapeOf(plan, y)];
        const spread = a[3 * n]! + b[3 * n]!;
        const least = bruteForceRmsd(x, y, mappings);
        const reached = (spread - n * least * least) / 2;
        tree.start(a, 0, b, 0, 1);
        expect(local.hopeless(0, reached * (1 - 1e-12), spread / 2)).toBe(false);
        if (!tree.hopeless(0, reached * 1.02) && local.hopeless(0, reached * 1.02, spread / 2)) turned += 1;
      }),
      { seed: 20267, numRuns: 1500 },
    );
    expect(turned).toBeGreaterThan(50);
  });
});

describe("plan", () => {
  it("keeps an atom choice of one's own as a whole", () => {
    // C1 and C3 of propane chosen: exchangeable; C1 alone: not.
    const propane = withHydrogens("CCC", chain(3));
    expect(makePlan(propane, Int32Array.of(0, 2)).chain.order).toBe(2);
    expect(makePlan(propane, Int32Array.of(0, 1)).chain.order).toBe(1);
    expect([...makePlan(propane, "heavy").atoms]).toEqual([...selectAtoms(propane, "heavy")]);
  });
});
