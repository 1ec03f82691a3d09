import fc from "fast-check";
import { Molecule as Drawing } from "openchemlib";
import { describe, expect, it } from "vitest";
import { type Molecule, mirrored, molecule, renamed } from "../../../tests/factories/molecule.ts";
import type { Graph } from "../structure.ts";
import { perceiveChirality } from "./chirality.ts";
import type { StereoUnit } from "./refine.ts";
import {
  type Configuration,
  ConfigurationComparer,
  fromConfiguration,
  isDouble,
  toConfiguration,
  unitSign,
  unitValue,
} from "./stereo.ts";
import { findStereoUnits } from "./stereo-units.ts";

const length = (xyz: Float64Array, a: number, b: number): number =>
  Math.hypot(...[0, 1, 2].map((k) => xyz[3 * a + k]! - xyz[3 * b + k]!));

function unitsOf({ graph, positions }: Molecule): StereoUnit[] {
  return findStereoUnits(graph).filter(
    (u) => u.kind === "centre" || isDouble(graph, u, length(positions, u.atoms[0], u.atoms[1])),
  );
}

function configurationOf(m: Molecule): Configuration {
  const units = unitsOf(m);
  return toConfiguration(
    units,
    units.map((u) => unitSign(u, m.positions)),
  );
}

function same(graph: Graph, a: Configuration, b: Configuration): boolean {
  const { units, signs } = fromConfiguration(graph, a);
  return new ConfigurationComparer(graph, units).same(signs, fromConfiguration(graph, b).signs);
}

/** Two SMILES of one constitution, written in the same order. */
function sameMolecule(one: string, two: string): boolean {
  const a = molecule(one);
  const b = molecule(two);
  expect(a.graph.bonds).toEqual(b.graph.bonds);
  return same(a.graph, configurationOf(a), configurationOf(b));
}

describe("unitValue", () => {
  const corners = [0, 0, 0, 1, 1, 1, 1, -1, -1, -1, 1, -1, -1, -1, 1];
  const four: StereoUnit = { kind: "centre", atom: 0, neighbours: [1, 2, 3, 4] };

  // Derived: unit vectors to alternate corners of a cube give 4 / (3 sqrt 3).
  it("is 0.7698 in an ideal tetrahedron, by four neighbours and by three", () => {
    expect(Math.abs(unitValue(four, corners))).toBeCloseTo(0.769800359, 9);
    const three: StereoUnit = { kind: "centre", atom: 0, neighbours: [1, 2, 3] };
    expect(Math.abs(unitValue(three, corners))).toBeCloseTo(0.769800359, 9);
    expect(Math.sign(unitValue(three, corners))).toBe(Math.sign(unitValue(four, corners)));
  });

  it("changes sign, and only that, when two neighbours are exchanged", () => {
    const bent = corners.map((x, k) => x + 0.1 * Math.sin(7 * k));
    const swapped: StereoUnit = { kind: "centre", atom: 0, neighbours: [1, 4, 3, 2] };
    expect(unitValue(swapped, bent)).toBeCloseTo(-unitValue(four, bent), 12);
  });

  it("is zero, and the sign undefined, where four neighbours lie in a plane", () => {
    const square = [0, 0, 0, 1, 0, 0, 0, 1, 0, -1, 0, 0, 0, -1, 0];
    expect(unitSign(four, square)).toBe(0);
  });

  it.each([
    [0, 1],
    [50, 1],
    [70, 0],
    [110, 0],
    [130, -1],
    [180, -1],
  ])("a torsion of %d° about a double bond has the sign %d", (degrees, sign) => {
    const t = (degrees * Math.PI) / 180;
    const bond: StereoUnit = { kind: "double-bond", atoms: [1, 2], sides: [[0], [3]] };
    const xyz = [0, 1, -0.5, 0, 0, 0, 0, 0, 1.34, Math.sin(t), Math.cos(t), 1.84];
    expect(unitSign(bond, xyz)).toBe(sign);
  });
});

describe("findStereoUnits: where a configuration can be", () => {
  const places = (smiles: string): string[] => {
    const m = molecule(smiles);
    return unitsOf(m).map((u) => (u.kind === "centre" ? "centre" : "double-bond"));
  };

  it.each([
    ["ethane", "CC"],
    ["isobutane: branches alike", "CC(C)C"],
    ["cyclohexane: CH2 is never one", "C1CCCCC1"],
    ["neopentane", "CC(C)(C)C"],
    ["dimethyl sulfone", "CS(=O)(=O)C"],
    ["trifluoroethane", "CC(F)(F)F"],
    ["diphenylmethanol: equal rings", "OC(C1=CC=CC=C1)C2=CC=CC=C2"],
    ["1,1-diphenylethene", "C=C(C1=CC=CC=C1)C2=CC=CC=C2"],
    ["isobutene", "C=C(C)C"],
    ["benzene", "C1=CC=CC=C1"],
    ["cyclohexene", "C1=CCCCC1"],
    ["biphenyl", "C1=CC=CC=C1C2=CC=CC=C2"],
    ["N-methylacetamide: conformational", "CC(=O)NC"],
    ["trialkylamine", "CN(CC)CCC"],
    ["butadiene's middle bond", "C=CC=C"],
    ["dimethyl phosphate anion", "COP(=O)([O-])OC"],
    ["allene", "CC=C=CC"],
    ["methyl phosphonic acid: a hydrogen moves", "CP(=O)(O)CC"],
  ])("%s has none", (_name, smiles) => {
    expect(places(smiles)).toEqual([]);
  });

  it.each([
    ["fluoroethanol", "CC(O)F", ["centre"]],
    ["deuterium counts", "CC(O)[2H]", ["centre"]],
    ["sulfoxide", "CS(=O)CC", ["centre"]],
    ["phosphine", "CP(CC)CCC", ["centre"]],
    ["a thiophosphoric acid, oxygen and sulfur differ", "CP(=S)(O)OC", ["centre"]],
    ["phosphonate ester", "CP(=O)(CC)OC", ["centre"]],
    ["2-butene", "CC=CC", ["double-bond"]],
    ["imine", "CC=NC", ["double-bond"]],
    ["diazene", "CN=NC", ["double-bond"]],
    ["oxime", "CC(CC)=NO", ["double-bond"]],
    ["1,4-dimethylcyclohexane", "CC1CCC(C)CC1", ["centre", "centre"]],
    [
      "quinuclidine with an arm: bridgehead N and C, and the carbon that carries it",
      "N1(CC2)CCC2CC1C",
      ["centre", "centre", "centre"],
    ],
    ["cyclooctene", "C1=CCCCCCC1", ["double-bond"]],
    ["hexadiene", "CC=CC=CC", ["double-bond", "double-bond"]],
    [
      "trihydroxyglutaric acid: the middle carbon depends on the others",
      "OC(=O)C(O)C(O)C(O)C(=O)O",
      ["centre", "centre", "centre"],
    ],
  ])("%s", (_name, smiles, expected) => {
    expect(places(smiles)).toEqual(expected);
  });

  it("nitrogen at the joint of two fused rings inverts and is none; a bridgehead is one", () => {
    const fused = molecule("C1CCN2CCCCC2C1");
    const bridged = molecule("N1(CC2)CCC2CC1");
    const nitrogens = (m: Molecule): number =>
      findStereoUnits(m.graph).filter((u) => u.kind === "centre" && m.graph.elements[u.atom] === 7).length;
    expect([nitrogens(fused), nitrogens(bridged)]).toEqual([0, 1]);
  });
});

describe("the same configuration", () => {
  it.each([
    ["enantiomers of alanine", "C[C@H](N)C(=O)O", "C[C@@H](N)C(=O)O", false],
    ["enantiomers of a sulfoxide", "C[S@](=O)CC", "C[S@@](=O)CC", false],
    ["E and Z butene", "C/C=C/C", "C/C=C\\C", false],
    ["E and Z imine", "C/C=N/C", "C/C=N\\C", false],
    ["RR and SS tartaric acid", "OC(=O)[C@H](O)[C@@H](O)C(=O)O", "OC(=O)[C@@H](O)[C@H](O)C(=O)O", false],
    [
      "meso tartaric acid and its mirror image",
      "OC(=O)[C@H](O)[C@H](O)C(=O)O",
      "OC(=O)[C@@H](O)[C@@H](O)C(=O)O",
      true,
    ],
    ["meso and RR tartaric acid", "OC(=O)[C@H](O)[C@H](O)C(=O)O", "OC(=O)[C@H](O)[C@@H](O)C(=O)O", false],
    ["cis and trans 1,4-dimethylcyclohexane", "C[C@H]1CC[C@@H](C)CC1", "C[C@H]1CC[C@H](C)CC1", false],
    ["trans 1,4-dimethylcyclohexane, both turned", "C[C@H]1CC[C@@H](C)CC1", "C[C@@H]1CC[C@H](C)CC1", true],
    ["methylcyclohexane, either way", "C[C@H]1CCCCC1", "C[C@@H]1CCCCC1", true],
    [
      "the two meso trihydroxyglutaric acids",
      "OC(=O)[C@H](O)[C@H](O)[C@H](O)C(=O)O",
      "OC(=O)[C@H](O)[C@@H](O)[C@H](O)C(=O)O",
      false,
    ],
    [
      "RR trihydroxyglutaric acid, its middle carbon either way",
      "OC(=O)[C@H](O)[C@H](O)[C@@H](O)C(=O)O",
      "OC(=O)[C@H](O)[C@@H](O)[C@@H](O)C(=O)O",
      true,
    ],
  ])("%s", (_name, one, two, expected) => {
    expect(sameMolecule(one, two)).toBe(expected);
  });

  it("2,4-hexadiene: E,Z and Z,E are the same, E,E is another", () => {
    const base = molecule("C/C=C/C=C/C");
    const { units, signs } = fromConfiguration(base.graph, configurationOf(base));
    const comparer = new ConfigurationComparer(base.graph, units);
    const [first, second] = [signs.slice(), signs.slice()];
    first[0] = -first[0]!;
    second[1] = -second[1]!;
    expect(comparer.same(first, second)).toBe(true);
    expect(comparer.same(signs, first)).toBe(false);
    expect(comparer.invariant(first)).toBe(comparer.invariant(second));
    expect(comparer.invariant(first)).not.toBe(comparer.invariant(signs));
  });

  // Inositols: 64 patterns of six ring carbons are 9 isomers, 7 of them achiral and one pair of enantiomers (textbook fact, from memory).
  it("inositol has nine isomers", () => {
    const m = molecule("OC1C(O)C(O)C(O)C(O)C1O");
    const units = unitsOf(m);
    const comparer = new ConfigurationComparer(m.graph, units);
    const kinds: Int8Array[] = [];
    let chiral = 0;
    for (let k = 0; k < 64; k++) {
      const signs = Int8Array.from(units, (_, u) => ((k >> u) & 1 ? 1 : -1));
      if (kinds.some((kind) => comparer.same(kind, signs))) continue;
      kinds.push(signs);
      const { chirality } = perceiveChirality(m.graph, toConfiguration(units, signs));
      if (chirality === "chiral") chiral += 1;
    }
    expect([kinds.length, chiral]).toEqual([9, 2]);
  });

  it("a flat centre fits either hand", () => {
    const m = molecule("C[C@H](N)C(=O)O");
    const { units } = fromConfiguration(m.graph, configurationOf(m));
    const comparer = new ConfigurationComparer(m.graph, units);
    expect([comparer.same([1], [0]), comparer.same([0], [-1]), comparer.same([1], [-1])]).toEqual([
      true,
      true,
      false,
    ]);
  });

  it("names the one centre that is inverted, also where the molecule is symmetric", () => {
    const m = molecule("OC(=O)[C@H](O)[C@@H](O)C(=O)O");
    const { units, signs } = fromConfiguration(m.graph, configurationOf(m));
    const comparer = new ConfigurationComparer(m.graph, units);
    expect(comparer.difference(signs, [-signs[0]!, signs[1]!])).toEqual([0]);
    expect(comparer.difference(signs, [-signs[0]!, -signs[1]!])).toEqual([0, 1]);
    const ring = molecule("C[C@H]1CC[C@@H](C)CC1");
    const trans = fromConfiguration(ring.graph, configurationOf(ring));
    const rings = new ConfigurationComparer(ring.graph, trans.units);
    expect(rings.difference(trans.signs, [trans.signs[0]!, -trans.signs[1]!])).toEqual([1]);
  });
});

/** What a general drawing library makes of the same SMILES: one known enantiomer, or not chiral. */
function chiralByDrawing(smiles: string): boolean {
  const drawing = Drawing.fromSmiles(smiles);
  drawing.ensureHelperArrays(Drawing.cHelperCIP);
  const kind = drawing.getChirality() & 0x7_0000;
  expect([Drawing.cChiralityKnownEnantiomer, Drawing.cChiralityMeso, Drawing.cChiralityNotChiral]).toContain(
    kind,
  );
  return kind === Drawing.cChiralityKnownEnantiomer;
}

describe("perceiveChirality", () => {
  // Checked against OpenChemLib's getChirality of the same SMILES.
  it.each([
    "CCO",
    "C[C@H](O)F",
    "OC(=O)[C@H](O)[C@@H](O)C(=O)O",
    "OC(=O)[C@H](O)[C@H](O)C(=O)O",
    "C[S@](=O)CC",
    "C[C@H]1CC[C@@H](C)CC1",
    "C[C@H]1CC[C@H](C)CC1",
    "C[C@H]1C[C@@H](C)CCC1",
    "C[C@H]1C[C@H](C)CCC1",
    "C[C@H]1CCCC[C@@H]1C",
    "C[C@H]1CCCC[C@H]1C",
    "OC(=O)[C@H](O)[C@H](O)[C@@H](O)C(=O)O",
    "OC(=O)[C@H](O)[C@H](O)[C@H](O)C(=O)O",
    "C/C=C/[C@H](O)/C=C/C",
    "C/C=C/[C@H](O)/C=C\\C",
    "F[C@H](Cl)[C@H](F)Cl",
    "F[C@H](Cl)[C@@H](F)Cl",
    "C[P@](CC)CCC",
    "O[C@H]1[C@@H](O)[C@@H](O)[C@H](O)[C@H](O)[C@@H]1O",
  ])("%s", (smiles) => {
    const m = molecule(smiles);
    const { chirality } = perceiveChirality(m.graph, configurationOf(m), { positions: m.positions });
    expect(chirality).toBe(chiralByDrawing(smiles) ? "chiral" : "achiral");
  });

  it.each([
    ["CCO", "No stereocentre."],
    ["CC1CCCCC1", "No stereocentre."],
    ["C[C@H](O)F", "One stereocentre, C5."],
    ["OC(=O)[C@H](O)[C@@H](O)C(=O)O", "2 stereocentres: C5 and C9."],
    ["OC(=O)[C@H](O)[C@H](O)C(=O)O", "Meso: C5 and C9 mirror each other."],
    ["C[C@H]1CC[C@@H](C)CC1", "Achiral: C5 and C13 lie on a mirror plane."],
  ])("says of %s: %s", (smiles, note) => {
    const m = molecule(smiles);
    expect(perceiveChirality(m.graph, configurationOf(m)).note).toBe(note);
  });

  it("is unsure where a centre is flat in the lowest frame", () => {
    const m = molecule("C[C@H](O)F");
    const configuration = configurationOf(m);
    const flat = m.positions.slice();
    for (let a = 0; a < m.graph.elements.length; a++) flat[3 * a + 2] = flat[3 * a + 2]! * 1e-3;
    const result = perceiveChirality(m.graph, configuration, { positions: flat });
    expect(result).toEqual({
      chirality: "unsure",
      note: "C5 is nearly flat in the lowest frame: taken as chiral.",
    });
    expect(perceiveChirality(m.graph, { centres: [[4, 0]], doubleBonds: [] }).chirality).toBe("unsure");
  });

  it("does not see a chiral axis, as said", () => {
    const m = molecule("FC=C=CF");
    expect(perceiveChirality(m.graph, configurationOf(m)).chirality).toBe("achiral");
  });
});

describe("laws", () => {
  const molecules = [
    "C[C@H](O)F",
    "OC(=O)[C@H](O)[C@H](O)C(=O)O",
    "C[C@H]1CC[C@@H](C)CC1",
    "C/C=C\\[C@H](Cl)[S@](=O)C",
    "N1(CC2)CCC2CC1",
  ];

  it.each(molecules)("reflection turns every centre of %s and no double bond", (smiles) => {
    const m = molecule(smiles);
    const before = configurationOf(m);
    const after = configurationOf({ ...m, positions: mirrored(m.positions) });
    expect(after.centres).toEqual(before.centres.map(([atom, sign]) => [atom, -sign]));
    expect(after.doubleBonds).toEqual(before.doubleBonds);
  });

  it.each(molecules)("another numbering of %s changes nothing but numbers", (smiles) => {
    const m = molecule(smiles);
    const n = m.graph.elements.length;
    const { chirality } = perceiveChirality(m.graph, configurationOf(m));
    fc.assert(
      fc.property(fc.shuffledSubarray([...Array(n).keys()], { minLength: n }), (order) => {
        const other = renamed(m, order);
        const configuration = configurationOf(other);
        expect(configuration.centres.map(([atom]) => atom).sort((a, b) => a - b)).toEqual(
          configurationOf(m)
            .centres.map(([atom]) => order[atom]!)
            .sort((a, b) => a - b),
        );
        expect(perceiveChirality(other.graph, configuration).chirality).toBe(chirality);
        const turned = configurationOf({ ...other, positions: mirrored(other.positions) });
        expect(same(other.graph, configuration, turned)).toBe(chirality === "achiral");
      }),
      { seed: 20261201, numRuns: 15 },
    );
  });
});
