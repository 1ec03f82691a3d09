import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { sketch } from "../../../tests/factories/smiles.ts";
import { type Graph, makeGraph } from "../structure.ts";
import { graphSignature, isomorphism, refineColours } from "./signature.ts";

const graph = (smiles: string): Graph => {
  const { elements, bonds, isotopes } = sketch(smiles);
  return makeGraph(elements, bonds, isotopes);
};

/** The same molecule with atom a called order[a]. */
function renamed(g: Graph, order: readonly number[]): Graph {
  const elements = new Uint8Array(g.elements.length);
  const isotopes = new Uint16Array(g.elements.length);
  order.forEach((to, from) => {
    elements[to] = g.elements[from]!;
    isotopes[to] = g.isotopes[from]!;
  });
  return makeGraph(
    elements,
    Array.from(g.bonds, (a) => order[a]!),
    isotopes,
  );
}

function isMapping(a: Graph, b: Graph, map: Int32Array | null): boolean {
  if (!map || new Set(map).size !== a.elements.length) return false;
  const bonds = new Set<string>();
  for (let k = 0; k < b.bonds.length; k += 2) bonds.add(`${b.bonds[k]}-${b.bonds[k + 1]}`);
  for (let k = 0; k < a.bonds.length; k += 2) {
    const [i, j] = [map[a.bonds[k]!]!, map[a.bonds[k + 1]!]!].sort((x, y) => x - y);
    if (!bonds.has(`${i}-${j}`)) return false;
  }
  return map.every((to, from) => a.elements[from] === b.elements[to] && a.isotopes[from] === b.isotopes[to]);
}

const molecules = [
  "CCO",
  "CC(C)(C)C",
  "C1CCCCC1",
  "C1=CC=CC=C1C",
  "OC(=O)C(O)C(O)C(=O)O",
  "C12C3C4C1C5C2C3C45",
  "[13CH3]C.O.O",
  "C1CC2CCC1CC2",
  "CC(C)(C)C1=CC=C(OC2=CC=C(C(F)(F)F)C=C2)C=C1",
  "[H][H].[He].[He]",
  "N1(CC2)CCN2CC1",
];

describe("refineColours", () => {
  it("ethane has one kind of carbon and one of hydrogen", () => {
    const colours = refineColours(graph("CC"));
    expect(new Set(colours).size).toBe(2);
    expect(colours[0]).toBe(colours[4]);
  });

  it("tells the carbons of butane apart, and their hydrogens", () => {
    expect(new Set(refineColours(graph("CCCC"))).size).toBe(4);
  });

  it("a further colour to begin with splits what is alike", () => {
    const ethane = graph("CC");
    expect(new Set(refineColours(ethane, [1, 0, 0, 0, 0, 0, 0, 0])).size).toBe(4);
  });
});

describe("graphSignature and isomorphism", () => {
  it.each(molecules)("%s in any order of atoms is the same molecule", (smiles) => {
    const g = graph(smiles);
    const n = g.elements.length;
    fc.assert(
      fc.property(fc.shuffledSubarray([...Array(n).keys()], { minLength: n }), (order) => {
        const other = renamed(g, order);
        expect(graphSignature(other)).toBe(graphSignature(g));
        expect(isMapping(g, other, isomorphism(g, other))).toBe(true);
        const colours = refineColours(g);
        const colours2 = refineColours(other);
        order.forEach((to, from) => {
          expect(colours2[to]).toBe(colours[from]);
        });
      }),
      { seed: 20261201, numRuns: 12 },
    );
  });

  it.each([
    ["CCCO", "CC(O)C"],
    ["CCO", "COC"],
    ["C1CCCCC1", "C1CC1C1CC1"],
    ["CC", "[13CH3]C"],
    ["CC(=O)NC", "CNC(=O)CC"],
    ["O.O", "OO"],
    ["C1CCCCC1.C", "CCCCCCC"],
  ])("%s and %s are different molecules", (a, b) => {
    expect(graphSignature(graph(a))).not.toBe(graphSignature(graph(b)));
    expect(isomorphism(graph(a), graph(b))).toBeNull();
  });

  // The pair that refinement cannot tell apart, hydrogens included (derived; it is the textbook case).
  it("decalin and 1,1'-bicyclopentyl share a signature and are told apart all the same", () => {
    const decalin = graph("C1CCCC2C1CCCC2");
    const bicyclopentyl = graph("C1CCCC1C1CCCC1");
    expect(graphSignature(decalin)).toBe(graphSignature(bicyclopentyl));
    expect(isomorphism(decalin, bicyclopentyl)).toBeNull();
    expect(isMapping(decalin, graph("C1CCC2CCCCC2C1"), isomorphism(decalin, graph("C1CCC2CCCCC2C1")))).toBe(
      true,
    );
  });

  it("a bond order makes no difference: both oxygens of a carboxylate are alike", () => {
    const acetate = graph("CC(=O)[O-]");
    const colours = refineColours(acetate);
    expect(colours[5]).toBe(colours[6]);
  });

  it("keeps given colours", () => {
    const ethane = graph("CC");
    const first = [1, 0, 0, 0, 0, 0, 0, 0];
    const second = [0, 0, 0, 0, 1, 0, 0, 0];
    expect(isomorphism(ethane, ethane, { colours: [first, second] })?.[0]).toBe(4);
    expect(isomorphism(ethane, ethane, { colours: [first, new Int32Array(8)] })).toBeNull();
  });

  it("a hundred waters are matched at once", () => {
    const waters = graph(Array(100).fill("O").join("."));
    const order = [...Array(300).keys()].reverse();
    expect(isMapping(waters, renamed(waters, order), isomorphism(waters, renamed(waters, order)))).toBe(true);
  });
});
