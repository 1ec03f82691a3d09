import { describe, expect, it } from "vitest";
import { readReference } from "../../../tests/factories/reference.ts";
import { torsion } from "../measure/geometry.ts";
import { makeGraph } from "../structure.ts";
import { KARPLUS_SETS, karplus } from "./karplus.ts";
import {
  firstUnbonded,
  fromDefinition,
  type Observable,
  observableValue,
  takesPhi,
  toDefinition,
} from "./observable.ts";
import { couplingWords, observableWords } from "./observable-words.ts";
import { peptideAngle, peptideChain } from "./peptide.ts";

/** C(i-1) and its O, N, CA, C and its O, H on N, HA; the numbering of the residue below. */
const RESIDUE = makeGraph(Uint8Array.of(6, 8, 7, 6, 6, 8, 1, 1, 6, 6, 6), [
  ...[0, 1, 0, 2, 2, 3, 3, 4, 4, 5, 2, 6, 3, 7, 3, 8, 0, 9, 4, 10],
]);

/**
 * N-CA along z, every bond at a right angle to it: the torsion of two substituents is the difference of their places.
 * C(i-1) stands at 0 degrees, C at phi, HA at 120 degrees from it, H at 180 degrees and so far out of plane.
 */
function residue(phi: number, side: 120 | -120, outOfPlane = 0): Float64Array {
  const positions = new Float64Array(33);
  const put = (atom: number, degrees: number, z: number) => {
    const t = (-degrees * Math.PI) / 180;
    positions.set([Math.cos(t), Math.sin(t), z], 3 * atom);
  };
  positions.set([0, 0, 0], 6);
  positions.set([0, 0, -1.5], 9);
  put(0, 0, 0);
  put(6, 180 + outOfPlane, 0);
  put(4, phi, -1.5);
  put(7, phi + side, -1.5);
  return positions;
}

const set = KARPLUS_SETS[0]!;
const coupling: Observable = {
  kind: "coupling",
  tuples: [[6, 2, 3, 7]],
  rule: "linear",
  set: set.id,
  own: null,
  angle: "phi",
};

describe("3J(HN-HA) of a peptide", () => {
  it("takes phi - 60 degrees in an L residue, by hand: 4.1075 Hz at phi -60, 9.87 Hz at -120", () => {
    const chain = peptideChain(RESIDUE, [6, 2, 3, 7])!;
    expect(chain).toEqual({ before: 0, n: 2, ca: 3, c: 4, ha: 7 });
    expect(peptideChain(RESIDUE, [7, 3, 2, 6])).toEqual(chain);
    expect(torsion(residue(-60, 120), 0, 2, 3, 4)).toBeCloseTo(-60, 9);
    expect(peptideAngle(residue(-60, 120), chain)).toBeCloseTo(-120, 9);
    // cos -120 = -1/2: 6.51/4 + 1.76/2 + 1.60; cos 180 = -1: 6.51 + 1.76 + 1.60.
    expect(observableValue(coupling, RESIDUE, residue(-60, 120))).toBeCloseTo(4.1075, 9);
    expect(observableValue(coupling, RESIDUE, residue(-120, 120))).toBeCloseTo(9.87, 9);
  });

  it("takes phi + 60 degrees where HA stands on the other side: a D residue is the mirror image", () => {
    expect(observableValue(coupling, RESIDUE, residue(60, -120))).toBeCloseTo(4.1075, 9);
    expect(observableValue(coupling, RESIDUE, residue(120, -120))).toBeCloseTo(9.87, 9);
  });

  it("does not move with an N-H out of plane, as the picked torsion does", () => {
    const bent = residue(-60, 120, 30);
    expect(observableValue(coupling, RESIDUE, bent)).toBeCloseTo(4.1075, 9);
    const { angle: _, ...picked } = coupling;
    // The H is 30 degrees on: t = -150, cos -150 = -0.8660: 6.51 x 0.75 + 1.76 x 0.8660 + 1.60 = 8.0067.
    expect(torsion(bent, 6, 2, 3, 7)).toBeCloseTo(-150, 9);
    expect(observableValue(picked, RESIDUE, bent)).toBeCloseTo(8.0067, 4);
  });

  it("differs by more than 1 Hz in the first structure of Ac-Ala-NHMe, whose N-H is out of plane", () => {
    const { frames, graph } = readReference("ensembles/ac-ala-nhme.xyz", "ensembles/ac-ala-nhme");
    const structure = frames.block.positions.subarray(0, 66);
    const path = [13, 3, 4, 14];
    const phi = torsion(structure, 1, 3, 4, 6)!;
    const own: Observable = { ...coupling, tuples: [path] };
    const { angle: _, ...picked } = own;
    expect(observableValue(own, graph, structure)).toBeCloseTo(karplus(phi - 60, set), 9);
    expect(observableValue(own, graph, structure)).toBeCloseTo(8.188, 3);
    expect(observableValue(picked, graph, structure)! - 8.188).toBeGreaterThan(1);
    expect(couplingWords(graph, path, own).angle).toContain("t = φ − 60° with φ the torsion C2–N4–C5–C7");
    expect(observableWords(own)).toContain("t from φ");
  });

  it("falls back to the picked torsion where the chain is not there, and says so", () => {
    // The same without the O of the residue before: an amine.
    const amine = makeGraph(Uint8Array.of(6, 1, 7, 6, 6, 8, 1, 1, 6, 6, 6), [
      ...[0, 1, 0, 2, 2, 3, 3, 4, 4, 5, 2, 6, 3, 7, 3, 8, 0, 9, 4, 10],
    ]);
    expect(takesPhi(set.id, amine, [6, 2, 3, 7])).toBe(false);
    expect(takesPhi("own", RESIDUE, [6, 2, 3, 7])).toBe(false);
    expect(takesPhi(set.id, RESIDUE, [6, 2, 3, 7])).toBe(true);
    expect(observableValue(coupling, amine, residue(-60, 120, 30))).toBeCloseTo(8.0067, 4);
    const { angle } = couplingWords(amine, [6, 2, 3, 7], { set: set.id, own: null });
    expect(angle).toContain("t is the picked torsion H7–N3–C4–H8");
    expect(angle).toContain("no such chain");
  });

  it("says its formula and source, and comes back from its stored definition", () => {
    const { formula, source } = couplingWords(RESIDUE, [6, 2, 3, 7], coupling);
    expect(formula).toBe("J = 6.51 cos² t − 1.76 cos t + 1.6 Hz");
    expect(source).toBe("J. Am. Chem. Soc. 1993, 115, 7772");
    expect(fromDefinition(toDefinition(coupling), "linear")).toEqual(coupling);
    // A column of before keeps the picked torsion, and says so.
    expect(couplingWords(RESIDUE, [6, 2, 3, 7], { set: set.id, own: null }).angle).toContain(
      "Measure it again",
    );
  });
});

describe("four picked atoms", () => {
  it("are a torsion of a bond only where they are bonded in a row", () => {
    expect(firstUnbonded(RESIDUE, [6, 2, 3, 7])).toBeNull();
    expect(firstUnbonded(RESIDUE, [6, 2, 4, 7])).toEqual([2, 4]);
    expect(firstUnbonded(RESIDUE, [1, 0, 2, 7])).toEqual([2, 7]);
  });
});
