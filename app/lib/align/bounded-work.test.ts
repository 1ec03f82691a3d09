import { describe, expect, it } from "vitest";
import { alkane, alkaneBonds } from "../../../tests/factories/geometry.ts";
import { adamantane, c60, cubane, dodecahedrane } from "../../../tests/factories/graphs.ts";
import {
  bruteForceRmsd,
  everyMapping,
  kabschRmsd,
  mirrored,
  pack,
} from "../../../tests/factories/yardstick.ts";
import { type AtomSet, type Graph, makeGraph } from "../structure.ts";
import { makePlan, type SymmetryPlan } from "./plan.ts";
import { writeShape } from "./shape.ts";
import { DEFAULT_NODE_LIMIT, SymmetricRmsd } from "./symmetric-rmsd.ts";
import { SymmetryNumber } from "./symmetry-number.ts";

/**
 * Molecules with many exchanges: what can be found is found exactly, and where the bound on the work is met the answer
 * says so. Work is counted in nodes of the search, which no machine changes.
 */

const alkaneGraph = (carbons: number) =>
  makeGraph(
    Uint8Array.from({ length: 3 * carbons + 2 }, (_, a) => (a < carbons ? 6 : 1)),
    alkaneBonds(carbons).flat(),
  );
const coil = (carbons: number, k: number) =>
  alkane(
    carbons,
    Array.from({ length: carbons - 3 }, (_, i) => [180, 65, -65, 180, 170][(i * k + i) % 5]!),
  );
/** Points that no exchange suits. */
const cloud = (atoms: number, k: number) =>
  Array.from({ length: atoms }, (_, a) =>
    [0, 1, 2].map((c) => 4 * Math.sin(1.7 * (3 * a + c) * k + (3 * a + c) ** 2 * 0.3 + k)),
  );

function shapeOf(plan: SymmetryPlan, points: number[][]): Float64Array {
  const shape = new Float64Array(plan.shapeLength);
  writeShape(plan, pack(points), 0, shape, 0);
  return shape;
}

describe("cages", () => {
  it.each([
    ["C60", c60(), "all", 120],
    ["dodecahedrane", dodecahedrane(), "all", 120],
    ["cubane", cubane(), "all", 48],
    ["adamantane", adamantane(), "heavy", 24],
  ] as [string, Graph, AtomSet, number][])(
    "%s: the exact minimum for unlike shapes, in few nodes (security E10)",
    (...row) => {
      const [, graph, atoms, order] = row;
      const plan = makePlan(graph, atoms);
      expect([plan.chain.order, plan.chain.complete]).toEqual([order, true]);
      const [x, y] = [cloud(graph.elements.length, 1), cloud(graph.elements.length, 2)];
      const comparer = new SymmetricRmsd(plan);
      const found = comparer.minimum(shapeOf(plan, x), 0, shapeOf(plan, y), 0, true);
      const maps = [...everyMapping(plan.chain, plan.atoms)];
      const chosen = (points: number[][]) => Array.from(plan.atoms, (a) => points[a]!);
      const expected = Math.min(
        bruteForceRmsd(chosen(x), chosen(y), maps),
        bruteForceRmsd(chosen(x), mirrored(chosen(y)), maps),
      );
      expect(found.exact).toBe(true);
      expect(Math.abs(found.rmsd - expected)).toBeLessThan(1e-9);
      expect(comparer.nodes).toBeLessThan(4 * order + 10);
    },
  );

  it("adamantane with its hydrogens (1,536 exchanges) in less nodes than exchanges", () => {
    const plan = makePlan(adamantane(), "all");
    expect(plan.chain.order).toBe(1536);
    const comparer = new SymmetricRmsd(plan);
    const [x, y] = [shapeOf(plan, cloud(26, 1)), shapeOf(plan, cloud(26, 2))];
    expect(comparer.minimum(x, 0, y, 0).exact).toBe(true);
    expect(comparer.nodes).toBeLessThan(1536);
  });
});

describe("long alkanes", () => {
  it("C40H82, two coils of 2 x 10^13 exchanges: exactly, within the bound", () => {
    const plan = makePlan(alkaneGraph(40), "all");
    expect(plan.chain.order).toBe(2 ** 38 * 72);
    const comparer = new SymmetricRmsd(plan);
    const [x, y] = [shapeOf(plan, coil(40, 1)), shapeOf(plan, coil(40, 2))];
    expect(comparer.minimum(x, 0, y, 0).exact).toBe(true);
    expect(comparer.nodes).toBeLessThan(DEFAULT_NODE_LIMIT);
  });

  it("C60H122, two coils: ends at the bound with a real exchange, and says upper bound (security E10)", () => {
    const graph = alkaneGraph(60);
    const plan = makePlan(graph, "all");
    const comparer = new SymmetricRmsd(plan);
    const [x, y] = [coil(60, 1), coil(60, 2)];
    const found = comparer.minimum(shapeOf(plan, x), 0, shapeOf(plan, y), 0);
    expect(found.exact).toBe(false);
    expect(comparer.nodes).toBeLessThan(1.01 * DEFAULT_NODE_LIMIT);
    const p = comparer.permutation();
    const named = kabschRmsd(
      x,
      Array.from(p, (a) => y[a]!),
    );
    expect(Math.abs(named - found.rmsd)).toBeLessThan(1e-9);
    for (let k = 0; k < graph.bonds.length; k += 2) {
      const [a, b] = [p[graph.bonds[k]!]!, p[graph.bonds[k + 1]!]!];
      const neighbours = graph.neighbours.subarray(graph.offsets[a], graph.offsets[a + 1]);
      expect(neighbours.includes(b)).toBe(true);
    }
  });

  it("a long search asks every 8,192 nodes whether to go on", () => {
    const plan = makePlan(alkaneGraph(60), "all");
    const comparer = new SymmetricRmsd(plan);
    let asked = 0;
    comparer.interrupt = () => {
      asked += 1;
    };
    comparer.minimum(shapeOf(plan, coil(60, 1)), 0, shapeOf(plan, coil(60, 2)), 0);
    expect(comparer.nodes / (asked + 1)).toBeLessThan(1.05 * 8192);
  });

  it("a long search may be ended from outside", () => {
    const plan = makePlan(alkaneGraph(60), "all");
    const comparer = new SymmetricRmsd(plan);
    let asked = 0;
    comparer.interrupt = () => {
      if (++asked === 3) throw new Error("enough");
    };
    const [x, y] = [shapeOf(plan, coil(60, 1)), shapeOf(plan, coil(60, 2))];
    expect(() => comparer.minimum(x, 0, y, 0)).toThrow("enough");
    expect(asked).toBe(3);
  });

  it("C60H122 with its hydrogens exchanged, shaken and turned end for end is found again exactly", () => {
    const plan = makePlan(alkaneGraph(60), "all");
    const x = coil(60, 1);
    const p = Int32Array.from({ length: 182 }, (_, a) => a);
    plan.chain.levels.forEach(({ transversal }, i) => {
      const u = transversal[(i * i + 1) % transversal.length]!;
      for (let a = 0; a < p.length; a++) p[a] = u[p[a]!]!;
    });
    const y = Array.from(p, () => [0, 0, 0]);
    x.forEach(([a, b, c], k) => {
      const s = (i: number) => 0.02 * Math.sin(5 * k + i);
      y[p[k]!] = [-b! + s(1), a! + s(2), c! + s(3)];
    });
    const comparer = new SymmetricRmsd(plan);
    const found = comparer.decide(shapeOf(plan, x), 0, shapeOf(plan, y), 0, 0.15, false);
    expect(found?.exact).toBe(true);
    expect(found!.rmsd).toBeLessThan(0.05);
    expect(comparer.nodes).toBeLessThan(5000);
  });

  it("C100H202: a symmetry number in few nodes, and a bound of one's own is kept", () => {
    const plan = makePlan(alkaneGraph(100), "all");
    expect(plan.chain.order).toBeGreaterThan(1e31);
    const symmetry = new SymmetryNumber(plan);
    expect(symmetry.count(shapeOf(plan, coil(100, 1)), 0)).toBe(1);
    expect(symmetry.nodes).toBeLessThan(2000);
    const comparer = new SymmetricRmsd(plan, 1000);
    const [x, y] = [shapeOf(plan, coil(100, 1)), shapeOf(plan, cloud(302, 2))];
    const found = comparer.minimum(x, 0, y, 0, true);
    expect(found.exact).toBe(false);
    expect(comparer.nodes).toBeLessThan(3000);
    // Far apart is far apart: no search is needed to say so.
    expect(comparer.decide(x, 0, y, 0, 0.5, true)).toBeNull();
    expect(comparer.lastWasCut).toBe(false);
  });
});
