import { describe, expect, test } from "vitest";
import { graphOf, readXyz } from "../../../tests/factories/read-xyz.ts";
import { makeGraph } from "../structure.ts";
import { ExchangedAtoms, exchangeWords } from "./exchanged-atoms.ts";

describe("exchanges of equivalent atoms", () => {
  test("are named atom by atom, hydrogens that only follow left out", () => {
    const elements = [6, 8, 8, 1, 1, 1];
    expect(exchangeWords(elements, [0, 1, 2], [0, 2, 1, 4, 5, 3])).toEqual(["O2 with O3"]);
    expect(exchangeWords(elements, [0, 1, 2, 3, 4, 5], [0, 2, 1, 4, 5, 3])).toEqual([
      "O2 with O3",
      "H4 to H5 to H6",
    ]);
    expect(exchangeWords(elements, [0, 1, 2], [0, 1, 2, 4, 5, 3])).toEqual([]);
  });

  test("are found between two frames of a real molecule whose equivalent atoms were numbered anew", () => {
    const frames = readXyz("fixtures/reference/ensembles/difluoroethane.xyz");
    const graph = graphOf(frames);
    const atoms = graph.elements.length;
    const first = frames.block.positions.slice(0, 3 * atoms);
    const fluorines = [...graph.elements].flatMap((z, k) => (z === 9 ? [k] : []));
    expect(fluorines).toHaveLength(2);
    const ends = { atoms: "heavy", symmetry: true, mirror: false } as const;
    const exchanges = new ExchangedAtoms(graph, ends);
    expect(exchanges.possible).toBe(true);
    expect(exchanges.between(first, first)).toEqual([]);
    // The same shape, its ends named the other way round, stretched at one end so that the ends are told apart.
    const stretched = first.slice();
    for (let c = 0; c < 3; c++) stretched[3 * fluorines[0]! + c]! += 0.3 * (c === 0 ? 1 : 0.5);
    const carbons = [...graph.elements].flatMap((z, k) => (z === 6 ? [k] : []));
    const turned = stretched.slice();
    for (const [a, b] of [fluorines, carbons] as [number, number][]) {
      turned.set(stretched.subarray(3 * b, 3 * b + 3), 3 * a);
      turned.set(stretched.subarray(3 * a, 3 * a + 3), 3 * b);
    }
    const words = [carbons, fluorines].map(([a, b]) => [a! + 1, b! + 1]);
    expect(exchanges.between(stretched, turned).sort()).toEqual(
      words.map(([a, b], k) => (k === 0 ? `C${a} with C${b}` : `F${a} with F${b}`)),
    );
    expect(new ExchangedAtoms(graph, { ...ends, symmetry: false }).possible).toBe(false);
  });

  test("cannot be where no atoms are equivalent", () => {
    const graph = makeGraph(Uint8Array.of(1, 8, 17), [0, 1, 1, 2]);
    expect(new ExchangedAtoms(graph, { atoms: "all", symmetry: true, mirror: true }).possible).toBe(false);
  });
});
