import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  adamantane,
  c60,
  chain,
  cubane,
  dodecahedrane,
  plainGraph,
  relabelled,
  ring,
  withHydrogens,
} from "../../../tests/factories/graphs.ts";
import { type Graph, makeGraph, selectAtoms } from "../structure.ts";
import { automorphismChain, orbitsOf, type StabiliserChain } from "./automorphisms.ts";

/** Yardstick: all automorphisms by trying images atom by atom. */
function everyAutomorphism(graph: Graph): number[][] {
  const n = graph.elements.length;
  const bonded = (a: number, b: number) =>
    graph.neighbours.subarray(graph.offsets[a]!, graph.offsets[a + 1]!).includes(b);
  const found: number[][] = [];
  const images: number[] = [];
  const place = (a: number) => {
    if (a === n) {
      found.push([...images]);
      return;
    }
    for (let image = 0; image < n; image++) {
      if (images.includes(image) || graph.elements[a] !== graph.elements[image]) continue;
      if (graph.isotopes[a] !== graph.isotopes[image]) continue;
      if (images.every((i, b) => bonded(a, b) === bonded(image, i))) {
        images.push(image);
        place(a + 1);
        images.pop();
      }
    }
  };
  place(0);
  return found;
}

/** All products of the transversals, as text. */
function everyProduct(chainOf: StabiliserChain): Set<string> {
  let products = [Array.from({ length: chainOf.degree }, (_, a) => a)];
  for (const level of chainOf.levels) {
    products = products.flatMap((p) => level.transversal.map((u) => Array.from(u, (image) => p[image]!)));
  }
  return new Set(products.map(String));
}

function checkStructure(graph: Graph, chainOf: StabiliserChain) {
  const fixed: number[] = [];
  for (const level of chainOf.levels) {
    expect(level.orbit[0]).toBe(level.base);
    level.transversal.forEach((u, k) => {
      expect(u[level.base]).toBe(level.orbit[k]);
      for (const b of fixed) expect(u[b]).toBe(b);
      expect(relabelled(graph, u)).toEqual(graph);
    });
    fixed.push(level.base);
  }
}

const orders = (graph: Graph) => [
  automorphismChain(graph, { subset: selectAtoms(graph, "heavy") }).order,
  automorphismChain(graph).order,
];

const tertButyl = (root: number, first: number): [number, number][] => [
  [root, first],
  [first, first + 1],
  [first, first + 2],
  [first, first + 3],
];

// RDKit's substructure matches of a molecule on itself, heavy atoms / with hydrogens.
const KNOWN: [string, Graph, [number, number]][] = [
  ["methane", withHydrogens("C", []), [1, 24]],
  ["ethane", withHydrogens("CC", chain(2)), [2, 72]],
  ["propane", withHydrogens("CCC", chain(3)), [2, 144]],
  ["butane", withHydrogens("CCCC", chain(4)), [2, 288]],
  [
    "neopentane",
    withHydrogens("CCCCC", [
      [0, 1],
      [0, 2],
      [0, 3],
      [0, 4],
    ]),
    [24, 31104],
  ],
  [
    "benzene",
    withHydrogens("CCCCCC", ring(6), [
      [0, 1],
      [2, 3],
      [4, 5],
    ]),
    [12, 12],
  ],
  ["cyclohexane", withHydrogens("CCCCCC", ring(6)), [12, 768]],
  [
    "toluene",
    withHydrogens(
      "CCCCCCC",
      [...ring(6), [0, 6]],
      [
        [0, 1],
        [2, 3],
        [4, 5],
      ],
    ),
    [2, 12],
  ],
  [
    "p-xylene",
    withHydrogens(
      "CCCCCCCC",
      [...ring(6), [0, 6], [3, 7]],
      [
        [0, 1],
        [2, 3],
        [4, 5],
      ],
    ),
    [4, 144],
  ],
  ["tert-butanol", withHydrogens("OCCCC", tertButyl(0, 1)), [6, 1296]],
  ["methanol", withHydrogens("CO", chain(2)), [1, 6]],
  ["ethanol", withHydrogens("CCO", chain(3)), [1, 12]],
  [
    "4-tert-butylphenyl 4-(trifluoromethyl)phenyl ether",
    withHydrogens(
      "CCCCCCOCCCCCCCCCCCFFF",
      // ring 0..5, O 6, ring 7..12, tert-butyl 13..16, CF3 17..20
      [
        ...ring(6),
        [0, 6],
        [6, 7],
        ...ring(6, 7),
        ...tertButyl(3, 13),
        [10, 17],
        [17, 18],
        [17, 19],
        [17, 20],
      ],
      [
        [0, 1],
        [2, 3],
        [4, 5],
        [7, 8],
        [9, 10],
        [11, 12],
      ],
    ),
    [144, 31104],
  ],
  [
    "2-(dimethylamino)ethyl 4-butoxybenzoate",
    withHydrogens(
      "CCCCOCCCCCCCOOCCNCC",
      // butyl 0..3, O 4, ring 5..10, C 11 (=O 12), O 13, ethyl 14 15, N 16, methyls 17 18
      [
        ...chain(4),
        [3, 4],
        [4, 5],
        ...ring(6, 5),
        [8, 11],
        [11, 12],
        [11, 13],
        ...chain(4, 13),
        [16, 17],
        [16, 18],
      ],
      [
        [5, 6],
        [7, 8],
        [9, 10],
        [11, 12],
      ],
    ),
    [4, 27648],
  ],
];

describe("order of the automorphism group", () => {
  it.each(KNOWN)("%s", (_name, graph, expected) => {
    expect(orders(graph)).toEqual(expected);
  });

  // Point groups of the figures: I_h 120, T_d 24, O_h 48; the 6 CH2 of adamantane exchange their hydrogens freely (2^6).
  it.each([
    ["C60", c60(), 120, 120],
    ["dodecahedrane", dodecahedrane(), 120, 120],
    ["cubane", cubane(), 48, 48],
    ["adamantane", adamantane(), 24, 24 * 64],
  ])("%s", (_name, graph, heavy, all) => {
    expect(orders(graph)).toEqual([heavy, all]);
    checkStructure(graph, automorphismChain(graph));
  });

  it("counts the exchange of whole molecules in a disconnected graph", () => {
    const water = (k: number): [number, number][] => [
      [3 * k, 3 * k + 1],
      [3 * k, 3 * k + 2],
    ];
    const graph = plainGraph("OHHOHHOHH", [0, 1, 2].flatMap(water));
    expect(automorphismChain(graph).order).toBe(6 * 8);
  });

  it("sees through graphs that colour refinement takes for one", () => {
    // Rings of 4, 3, 4 and 3 atoms: all alike to refinement. 8^2 2 for the rings of four, 6^2 2 for those of three.
    const rings = plainGraph("C".repeat(14), [...ring(4), ...ring(3, 4), ...ring(4, 7), ...ring(3, 11)]);
    expect(automorphismChain(rings).order).toBe(8 * 8 * 2 * 6 * 6 * 2);
    checkStructure(rings, automorphismChain(rings));
    // Decalin and 1,1'-bicyclopentyl, one of each and then two of the second: 4 and 8 exchanges of their carbons.
    const decalin = (first: number): [number, number][] => [...ring(10, first), [first, first + 5]];
    const bicyclopentyl = (first: number): [number, number][] => [
      ...ring(5, first),
      ...ring(5, first + 5),
      [first, first + 5],
    ];
    const both = plainGraph("C".repeat(20), [...decalin(0), ...bicyclopentyl(10)]);
    const three = plainGraph("C".repeat(30), [...bicyclopentyl(0), ...decalin(10), ...bicyclopentyl(20)]);
    expect(automorphismChain(both).order).toBe(4 * 8);
    expect(automorphismChain(three).order).toBe(4 * 8 * 8 * 2);
    checkStructure(three, automorphismChain(three));
  });

  it("keeps a carboxylic acid's oxygens apart among the heavy atoms and a carboxylate's not", () => {
    const acid = withHydrogens(
      "CCOO",
      [
        [0, 1],
        [1, 2],
        [1, 3],
      ],
      [[1, 2]],
    );
    const carboxylate = plainGraph("CCOOHHH", [
      [0, 1],
      [1, 2],
      [1, 3],
      [0, 4],
      [0, 5],
      [0, 6],
    ]);
    expect(orders(acid)).toEqual([1, 6]);
    expect(orders(carboxylate)).toEqual([2, 12]);
  });

  it("never exchanges isotopes, nor atoms of other given colours", () => {
    const methane = withHydrogens("C", []);
    const deuterated = makeGraph(methane.elements, methane.bonds, Uint16Array.of(0, 2, 0, 0, 0));
    expect(automorphismChain(deuterated).order).toBe(6);
    expect(automorphismChain(methane, { colours: Int32Array.of(0, 1, 1, 0, 0) }).order).toBe(4);
    expect(() => automorphismChain(methane, { colours: Int32Array.of(0) })).toThrow(RangeError);
  });
});

describe("stabiliser chain", () => {
  it("lists every automorphism once, on random coloured graphs", () => {
    const graphs = fc
      .integer({ min: 1, max: 7 })
      .chain((n) =>
        fc.tuple(
          fc.array(fc.constantFrom(6, 7), { minLength: n, maxLength: n }),
          fc.array(fc.boolean(), { minLength: (n * (n - 1)) / 2, maxLength: (n * (n - 1)) / 2 }),
        ),
      );
    fc.assert(
      fc.property(graphs, ([elements, edges]) => {
        const bonds: number[] = [];
        let k = 0;
        for (let a = 0; a < elements.length; a++) {
          for (let b = a + 1; b < elements.length; b++) if (edges[k++]) bonds.push(a, b);
        }
        const graph = makeGraph(Uint8Array.from(elements), bonds);
        const result = automorphismChain(graph);
        const expected = everyAutomorphism(graph);
        expect(result.complete).toBe(true);
        expect(result.order).toBe(expected.length);
        expect(everyProduct(result)).toEqual(new Set(expected.map(String)));
      }),
      { seed: 20251, numRuns: 300 },
    );
  });

  it("does not depend on how the atoms are numbered", () => {
    const graph = KNOWN[13]![1];
    const n = graph.elements.length;
    fc.assert(
      fc.property(fc.shuffledSubarray([...Array(n).keys()], { minLength: n, maxLength: n }), (names) => {
        const renamed = relabelled(graph, names);
        const result = automorphismChain(renamed);
        expect(result.order).toBe(27648);
        checkStructure(renamed, result);
      }),
      { seed: 20252, numRuns: 8 },
    );
  });

  it("restricted to a subset runs over distinct restrictions, its permutations over all atoms", () => {
    const graph = KNOWN[4]![1];
    const subset = selectAtoms(graph, "heavy");
    const result = automorphismChain(graph, { subset });
    checkStructure(graph, result);
    expect(result.levels.every((level) => subset.includes(level.base))).toBe(true);
    const restrictions = [...everyProduct(result)].map((p) => String(p.split(",").slice(0, subset.length)));
    expect(new Set(restrictions).size).toBe(24);
  });

  it("takes the skeleton first and hydrogens last", () => {
    const bases = automorphismChain(KNOWN[12]![1]).levels.map((level) => KNOWN[12]![1].elements[level.base]);
    expect(bases.indexOf(1)).toBeGreaterThan(bases.lastIndexOf(6));
  });

  it("moves as few atoms as a local exchange needs", () => {
    const graph = withHydrogens("C".repeat(30), chain(30));
    for (const level of automorphismChain(graph).levels.slice(1)) {
      for (const u of level.transversal)
        expect(u.filter((image, a) => image !== a).length).toBeLessThanOrEqual(3);
    }
  });

  it("takes a thousand atoms", () => {
    // C332H666: 330 CH2 with two orders each, two CH3 with six, and the exchange of the ends.
    const graph = withHydrogens("C".repeat(332), chain(332));
    const result = automorphismChain(graph);
    expect(graph.elements.length).toBe(998);
    expect(result.complete).toBe(true);
    expect(Math.log2(result.order)).toBeCloseTo(330 + Math.log2(72), 6);
  });

  it("takes branched trees with hundreds of methyl groups", () => {
    // Each of 4 arms branches in three, four times; C161: 1 + 4 + 12 + 36 + 108 carbons.
    const bonds: [number, number][] = [];
    let front = [0];
    let next = 1;
    for (const branches of [4, 3, 3, 3]) {
      front = front.flatMap((a) =>
        Array.from({ length: branches }, () => {
          bonds.push([a, next]);
          return next++;
        }),
      );
    }
    const graph = withHydrogens("C".repeat(next), bonds);
    const result = automorphismChain(graph, { subset: selectAtoms(graph, "heavy") });
    expect(next).toBe(161);
    expect(Math.log2(result.order)).toBeCloseTo(Math.log2(24) + (4 + 12 + 36) * Math.log2(6), 6);
  });

  it("says so when the work limit is met, and still lists true automorphisms", () => {
    const graph = c60();
    const result = automorphismChain(graph, { workLimit: 3000 });
    expect(result.complete).toBe(false);
    expect(result.order).toBeLessThan(120);
    checkStructure(graph, result);
  });

  it("has no level where nothing can be exchanged", () => {
    const graph = plainGraph("CNOF", chain(4));
    expect(automorphismChain(graph)).toEqual({ degree: 4, order: 1, complete: true, levels: [] });
    expect(automorphismChain(makeGraph(new Uint8Array(0), [])).order).toBe(1);
  });
});

describe("orbits", () => {
  it("names classes by their smallest atom, of the whole group or of a stabiliser", () => {
    const propane = withHydrogens("CCC", chain(3));
    const result = automorphismChain(propane);
    expect([...orbitsOf(result)].slice(0, 3)).toEqual([0, 1, 0]);
    expect([...orbitsOf(result, 1)].slice(0, 3)).toEqual([0, 1, 2]);
    expect([...orbitsOf(result, result.levels.length)]).toEqual([...Array(11).keys()]);
  });
});
