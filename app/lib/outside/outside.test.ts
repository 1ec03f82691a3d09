import { describe, expect, it } from "vitest";
import { mulberry } from "../../../tests/factories/embed.ts";
import { mirrored, molecule } from "../../../tests/factories/molecule.ts";
import { graphOf, readXyz } from "../../../tests/factories/read-xyz.ts";
import { makePlan } from "../align/plan.ts";
import { rmsdTo } from "../align/rmsd-to.ts";
import { perceiveBonds } from "../chem/bonds.ts";
import { type AtomSet, type Graph, selectAtoms } from "../structure.ts";
import { compareTorsions, mainTorsions, OutsideComparer } from "./compare-outside.ts";
import { mapOutside } from "./map-outside.ts";

const frames = readXyz("fixtures/reference/ensembles/aminoester.xyz");
const graph = graphOf(frames);
const stride = 3 * frames.block.atoms;
const frameAt = (k: number) => frames.block.positions.slice(k * stride, (k + 1) * stride);

/** Atoms of a frame in another order, some left out, turned and shifted. */
function asPose(from: Graph, positions: Float64Array, keep: ArrayLike<number>, seed = 7) {
  const random = mulberry(seed);
  const order = Array.from(keep);
  for (let k = order.length - 1; k > 0; k--) {
    const j = Math.floor(random() * (k + 1));
    [order[k], order[j]] = [order[j]!, order[k]!];
  }
  const elements = Uint8Array.from(order, (atom) => from.elements[atom]!);
  const out = Float64Array.from(
    order.flatMap((atom) => [
      -positions[3 * atom + 1]! + 3,
      positions[3 * atom]! - 8,
      positions[3 * atom + 2]! + 1,
    ]),
  );
  return { elements, positions: out, bonds: perceiveBonds(elements, out).bonds };
}

function inOrder(map: Int32Array, positions: Float64Array): Float64Array {
  const out = new Float64Array(3 * map.length);
  map.forEach((from, atom) => {
    if (from >= 0) out.set(positions.subarray(3 * from, 3 * from + 3), 3 * atom);
  });
  return out;
}

function mapped(from: Graph, pose: ReturnType<typeof asPose>) {
  const found = mapOutside(from, pose);
  if ("refused" in found) throw new Error(found.refused);
  return found;
}

describe("mapping a structure from outside", () => {
  const kept: [string, AtomSet, number[]][] = [
    ["all atoms", "all", [...selectAtoms(graph, "all")]],
    ["no hydrogens", "heavy", [...selectAtoms(graph, "heavy")]],
  ];

  it.each(kept)("finds itself among the frames in another order, with %s", (_, set, keep) => {
    const pose = asPose(graph, frameAt(12), keep);
    const found = mapped(graph, pose);
    expect(found.remarks).toHaveLength(set === "all" ? 0 : 1);
    const outside = { positions: inOrder(found.map, pose.positions), atoms: found.atoms };
    const { rmsd, exact } = new OutsideComparer(graph, outside, "heavy").compare(frames.block);
    expect(rmsd[12]).toBeLessThan(1e-6);
    expect(exact[12]).toBe(1);
    for (let atom = 0; atom < found.map.length; atom++) {
      if (found.map[atom]! >= 0) expect(pose.elements[found.map[atom]!]).toBe(graph.elements[atom]);
    }
  });

  it("gives the RMSDs that frames of the ensemble have to each other", () => {
    const pose = asPose(graph, frameAt(30), selectAtoms(graph, "all"));
    const { map, atoms } = mapped(graph, pose);
    const own = rmsdTo(makePlan(graph, "heavy+polarH"), frames.block, 30);
    const outside = { positions: inOrder(map, pose.positions), atoms };
    const found = new OutsideComparer(graph, outside, "heavy+polarH").compare(frames.block);
    found.rmsd.forEach((rmsd, k) => {
      expect(rmsd).toBeCloseTo(own.rmsd[k]!, 9);
    });
  });

  it("keeps hydrogens on O and N where those on carbon are missing", () => {
    const acid = molecule("CC(N)C(=O)NCCO");
    const keep = selectAtoms(acid.graph, "heavy+polarH");
    const found = mapped(acid.graph, asPose(acid.graph, acid.positions, keep));
    expect(found.atoms).toBe("heavy+polarH");
    expect(found.remarks[0]).toContain("with those on N, O, S and P");
  });

  it("maps another charge on the heavy atoms, and says so", () => {
    const acid = molecule("CCC(=O)O");
    const proton = acid.graph.elements.length - 1;
    const keep = [...acid.graph.elements.keys()].filter((atom) => atom !== proton);
    expect(acid.graph.elements[proton]).toBe(1);
    const found = mapped(acid.graph, asPose(acid.graph, acid.positions, keep));
    expect(found.atoms).toBe("heavy");
    expect(found.remarks[0]).toContain("another charge or tautomer");
  });

  it("leaves water in the file out", () => {
    const pose = asPose(graph, frameAt(3), selectAtoms(graph, "all"));
    const elements = Uint8Array.from([8, 1, 1, ...pose.elements]);
    const positions = Float64Array.from([90, 0, 0, 90.9, 0, 0, 89.7, 0.9, 0, ...pose.positions]);
    const { bonds } = perceiveBonds(elements, positions);
    const found = mapped(graph, { elements, positions, bonds });
    expect(found.atoms).toBe("all");
    expect(Math.min(...found.map)).toBe(3);
    expect(found.remarks).toEqual(["3 atoms of other molecules in the file were left out."]);
  });

  it.each([
    ["another molecule", "CCO", "CCN", "another molecule"],
    ["an isomer", "CCCO", "CCOC", "bonded otherwise"],
    ["cyclohexane for benzene", "C1=CC=CC=C1", "C1CCCCC1", "hydrogens on carbon"],
  ])("refuses %s in words", (_, own, other, words) => {
    const theirs = molecule(other);
    const found = mapOutside(molecule(own).graph, theirs.graph);
    expect("refused" in found && found.refused).toContain(words);
  });
});

describe("a structure beside a conformer", () => {
  const butanol = molecule("CC[C@H](C)O");
  // The atom bonded to O: the factory puts the hydrogens behind each heavy atom.
  const centre = butanol.graph.neighbours[butanol.graph.offsets[butanol.graph.elements.indexOf(8)]!]!;

  it("is laid on it atom by atom, equivalent atoms exchanged", () => {
    const pose = asPose(graph, frameAt(5), selectAtoms(graph, "heavy"), 99);
    const { map, atoms } = mapped(graph, pose);
    const comparer = new OutsideComparer(graph, { positions: inOrder(map, pose.positions), atoms }, "heavy");
    const fitted = comparer.fit(frameAt(5), false);
    for (const { apart } of compareTorsions(mainTorsions(graph), frameAt(5), fitted, false)) {
      expect(apart).toBeLessThan(0.01);
    }
    const nearest = comparer.compare(frames.block);
    expect(nearest.mirrorRmsd[5]).toBeGreaterThan(nearest.rmsd[5]!);
  });

  it("as a mirror image has the same torsions with the other sign", () => {
    const outside = { positions: mirrored(frameAt(9)), atoms: "all" as const };
    const comparer = new OutsideComparer(graph, outside, "heavy");
    const found = comparer.compare({ atoms: graph.elements.length, count: 1, positions: frameAt(9) });
    expect(found.mirrorRmsd[0]).toBeLessThan(1e-6);
    const torsions = compareTorsions(mainTorsions(graph), frameAt(9), comparer.fit(frameAt(9), true), true);
    expect(torsions.length).toBeGreaterThan(4);
    for (const { apart } of torsions) expect(apart).toBeLessThan(0.01);
  });

  it("of the other enantiomer is known as one, with and without hydrogens", () => {
    for (const atoms of ["all", "heavy"] as const) {
      const same = new OutsideComparer(butanol.graph, { positions: butanol.positions, atoms }, "heavy");
      expect(same.otherConfiguration(butanol.positions, same.fit(butanol.positions, false))).toEqual([]);
      const outside = { positions: mirrored(butanol.positions), atoms };
      const other = new OutsideComparer(butanol.graph, outside, "heavy");
      expect(other.otherConfiguration(butanol.positions, other.fit(butanol.positions, false))).toEqual([
        centre,
      ]);
    }
  });
});

describe("main torsions", () => {
  it("are those about open bonds with heavy atoms at both ends", () => {
    expect(mainTorsions(molecule("CCCC").graph)).toHaveLength(1);
    expect(mainTorsions(molecule("C1CCCCC1").graph)).toEqual([]);
    expect(mainTorsions(molecule("CC(=O)NC").graph)).toHaveLength(1);
  });
});
