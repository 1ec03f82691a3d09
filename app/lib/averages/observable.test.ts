import { describe, expect, it } from "vitest";
import { alkane, alkaneBonds } from "../../../tests/factories/geometry.ts";
import { readReference } from "../../../tests/factories/reference.ts";
import { distance, torsion } from "../measure/geometry.ts";
import { makeGraph } from "../structure.ts";
import { mergeEquivalentAtoms } from "./atom-groups.ts";
import { averagesCsv } from "./averages-csv.ts";
import { GENERAL_SET, KARPLUS_SETS, karplus } from "./karplus.ts";
import {
  fromDefinition,
  type Observable,
  observableValue,
  toDefinition,
  whyNotGeneral,
} from "./observable.ts";
import { ParityGroup } from "./parity-group.ts";
import { initialRule, isPseudoscalar, possibleRules, ruleOf } from "./rule.ts";
import { mirrorLabel, pairLabel, shapeLabel, torsionLabel } from "./torsion-label.ts";

const { frames, graph } = readReference("ensembles/tosylamide.sdf", "ensembles/tosylamide");
const first = frames.block.positions.subarray(0, 96);
const plain = { set: null, own: null };

describe("observables on a structure", () => {
  it("a methyl group to two ring sides: mean of r^-6 over six pairs", () => {
    const group = new ParityGroup(graph, first, true);
    const ofType = (count: number, bonds: number) =>
      [...graph.elements.keys()].find((a) => {
        const at = [...graph.neighbours.subarray(graph.offsets[a]!, graph.offsets[a + 1]!)];
        return (
          graph.elements[a] === 6 &&
          at.length === bonds &&
          at.filter((b) => graph.elements[b] === 1).length === count
        );
      })!;
    const hydrogen = (carbon: number) =>
      [...graph.neighbours.subarray(graph.offsets[carbon]!, graph.offsets[carbon + 1]!)].find(
        (b) => graph.elements[b] === 1,
      )!;
    const tuples = group.orbit([hydrogen(ofType(3, 4)), hydrogen(ofType(1, 3))])!;
    expect(tuples).toHaveLength(6);
    const observable: Observable = { kind: "distance", tuples, rule: "r-6", ...plain };
    const byHand = tuples.map(([i, j]) => distance(first, i!, j!));
    const mean = byHand.reduce((total, r) => total + r ** -6, 0) / 6;
    expect(observableValue(observable, graph, first)).toBeCloseTo(mean ** (-1 / 6), 12);
    const linear = observableValue({ ...observable, rule: "linear" }, graph, first)!;
    expect(linear).toBeCloseTo(byHand.reduce((total, r) => total + r, 0) / 6, 12);
    expect(observableValue({ ...observable, rule: "r-3" }, graph, first)!).toBeLessThan(linear);
  });

  it("is the same after equivalent atoms are numbered otherwise, once their places are known", () => {
    const reference = readReference("ensembles/ac-ala-nhme.xyz", "ensembles/ac-ala-nhme");
    const structure = reference.frames.block.positions.subarray(0, 66);
    const group = new ParityGroup(reference.graph, structure, false);
    const tuple = [...reference.graph.elements.keys()]
      .filter((a) => reference.graph.elements[a] === 1)
      .slice(0, 2);
    const observable: Observable = { kind: "distance", tuples: group.orbit(tuple)!, rule: "r-6", ...plain };
    const before = observableValue(observable, reference.graph, structure)!;
    // The first methyl group's hydrogens turned against their numbering by one exchange: another hand.
    const carbon = reference.graph.neighbours[reference.graph.offsets[tuple[0]!]!]!;
    const three = [
      ...reference.graph.neighbours.subarray(
        reference.graph.offsets[carbon]!,
        reference.graph.offsets[carbon + 1]!,
      ),
    ].filter((b) => reference.graph.elements[b] === 1);
    const swapped = structure.slice();
    swapped.set(structure.subarray(3 * three[0]!, 3 * three[0]! + 3), 3 * three[1]!);
    swapped.set(structure.subarray(3 * three[1]!, 3 * three[1]! + 3), 3 * three[0]!);
    expect(observableValue(observable, reference.graph, swapped, group.relabelling(swapped))).toBeCloseTo(
      before,
      9,
    );
    // Of these very atoms, wanted without their equivalents, the numbering of the file counts, as it does for a torsion.
    const alone: Observable = { ...observable, tuples: [[three[0]!, 0]], rule: "linear", numbered: "file" };
    const as = (positions: Float64Array) =>
      observableValue(alone, reference.graph, positions, group.relabelling(positions));
    expect(as(swapped)).toBeCloseTo(distance(swapped, three[0]!, 0), 12);
    expect(fromDefinition(toDefinition(alone), "linear")).toEqual(alone);
  });

  it("couplings are averaged over torsions, not the torsion over couplings", () => {
    const positions = Float64Array.from(alkane(4, [180]).flat());
    const butane = makeGraph(
      Uint8Array.from({ length: 14 }, (_, k) => (k < 4 ? 6 : 1)),
      alkaneBonds(4).flat(),
    );
    const group = new ParityGroup(butane, positions, true);
    const tuples = group.orbit([4, 0, 1, 7])!;
    expect(whyNotGeneral(butane, [4, 0, 1, 7])).toBeNull();
    expect(whyNotGeneral(butane, [0, 1, 2, 3])).toContain("H, C, C and H");
    const set = KARPLUS_SETS[0]!;
    const observable: Observable = { kind: "coupling", tuples, rule: "linear", set: set.id, own: null };
    const each = tuples.map(([i, j, k, l]) => karplus(torsion(positions, i!, j!, k!, l!)!, set));
    expect(observableValue(observable, butane, positions)).toBeCloseTo(
      each.reduce((total, j) => total + j, 0) / each.length,
      12,
    );
    // A turning ethyl group couples with 7 to 8 Hz (common practice, no source).
    const general = observableValue({ ...observable, set: GENERAL_SET }, butane, positions)!;
    expect(general).toBeGreaterThan(6);
    expect(general).toBeLessThan(9);
    expect(() => observableValue({ ...observable, set: "none" }, butane, positions)).toThrow(RangeError);
  });

  it("comes back from its stored definition", () => {
    const observable: Observable = {
      kind: "coupling",
      tuples: [[4, 0, 1, 7]],
      rule: "linear",
      set: "own",
      own: { a: 12, b: -0.2, c: 0 },
    };
    expect(fromDefinition(toDefinition(observable), "linear")).toEqual(observable);
    expect(toDefinition(observable).atoms).toEqual([[5, 1, 2, 8]]);
  });

  it("has no value where atoms lie on one line", () => {
    const line = Float64Array.of(0, 0, 0, 1, 0, 0, 2, 0, 0, 3, 0, 0);
    const chain = makeGraph(Uint8Array.of(6, 6, 6, 6), [0, 1, 1, 2, 2, 3]);
    expect(
      observableValue({ kind: "torsion", tuples: [[0, 1, 2, 3]], rule: "circular", ...plain }, chain, line),
    ).toBeNull();
  });
});

describe("per-atom values", () => {
  it("are merged over equivalent atoms in each conformer, in its own numbering", () => {
    const columns = [
      { atom: 1, values: [2, 10, 1] },
      { atom: 2, values: [4, 20, null] },
      { atom: 3, values: [7, 30, 8] },
    ];
    const found = mergeEquivalentAtoms(columns, Int32Array.of(0, 1, 1, 3), (row) =>
      row === 1 ? Int32Array.of(0, 3, 2, 1) : null,
    );
    expect(found).toEqual([
      { atoms: [1, 2], values: [3, 25, null] },
      { atoms: [3], values: [7, 10, 8] },
    ]);
  });
});

describe("rules", () => {
  it("angles start as circular, everything else as a plain mean", () => {
    expect([initialRule("°"), initialRule("deg"), initialRule("Å"), initialRule(null)]).toEqual([
      "circular",
      "circular",
      "linear",
      "linear",
    ]);
    expect(ruleOf({ rule: "r-3", unit: "Å" })).toBe("r-3");
    expect(ruleOf({ rule: null, unit: "deg" })).toBe("circular");
  });
  it("knows quantities that change sign in the mirror", () => {
    for (const name of ["Optical rotation", "optical_rotation_589", "rotatory strength R1", "CD 220 nm"])
      expect(isPseudoscalar(name), name).toBe(true);
    for (const name of ["Rotational constant A", "dipole", "CDK2 contact", "shift C10"])
      expect(isPseudoscalar(name), name).toBe(false);
  });
  it("proposes what a quantity is likely to mean", () => {
    expect(possibleRules({ name: "d_C1_ortho", unit: "Å" })[0]).toBe("r-6");
    expect(possibleRules({ name: "radius_of_gyration", unit: "Å" })[0]).toBe("linear");
    expect(possibleRules({ name: "dipole", unit: "D" })[0]).toBe("rms");
    expect(possibleRules({ name: "CCC_angle", unit: "°" })[0]).toBe("linear");
    expect(possibleRules({ name: "dihedral angle", unit: "°" })[0]).toBe("circular");
  });
});

describe("labels of torsions", () => {
  it.each([
    [0, "c"],
    [30, "c"],
    [-30.1, "g\u2212"],
    [62, "g+"],
    [90, "g+"],
    [91, "a+"],
    [-150, "a\u2212"],
    [151, "t"],
    [180, "t"],
    [-179, "t"],
    [null, "\u2013"],
  ])("%s: %s", (degrees, label) => {
    expect(torsionLabel(degrees)).toBe(label);
  });
  it("are joined for a conformer, and turn their signs in the mirror", () => {
    expect(shapeLabel([178, 62, -58])).toBe("t g+ g\u2212");
    expect(mirrorLabel("t g+ g\u2212")).toBe("t g\u2212 g+");
    expect([pairLabel("t g\u2212 g+"), pairLabel("t g+ g+"), pairLabel("t c")]).toEqual([
      "t g+ g\u2212",
      "t g+ g+",
      "t c",
    ]);
  });
});

describe("averages.csv", () => {
  it("is RFC 4180, with every digit, empty where nothing is known, and no cell that a spreadsheet would run", () => {
    const text = averagesCsv([
      {
        property: "=cmd()",
        unit: "-",
        rule: "linear",
        average: 1 / 3,
        spread: 0.1,
        uncertainty: 0.05,
        covered: 1,
      },
      {
        property: 'a "b", c',
        unit: null,
        rule: "r-6",
        average: null,
        spread: null,
        uncertainty: null,
        covered: 0.541,
      },
    ]);
    expect(text.split("\r\n")).toEqual([
      "property,unit,rule,average,spread,uncertainty,covered",
      "'=cmd(),'-,linear,0.3333333333333333,0.1,0.05,1",
      '"a ""b"", c",,r-6,,,,0.541',
      "",
    ]);
  });
});
