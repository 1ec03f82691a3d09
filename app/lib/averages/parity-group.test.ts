import { describe, expect, it } from "vitest";
import { embed } from "../../../tests/factories/embed.ts";
import { readReference } from "../../../tests/factories/reference.ts";
import { sketch } from "../../../tests/factories/smiles.ts";
import { makeGraph } from "../structure.ts";
import { ParityGroup } from "./parity-group.ts";

/** Classes as lists of atoms from 0, those of one atom left out. */
function classLists(classes: Int32Array): number[][] {
  const lists = new Map<number, number[]>();
  classes.forEach((first, atom) => {
    lists.set(first, [...(lists.get(first) ?? []), atom]);
  });
  return [...lists.values()].filter((list) => list.length > 1);
}

function groupOf(smiles: string, achiral: boolean, seed = 1) {
  const molecule = sketch(smiles);
  const graph = makeGraph(molecule.elements, molecule.bonds, molecule.isotopes);
  return new ParityGroup(graph, embed(molecule, seed), achiral);
}

describe("equivalent atoms", () => {
  // Atoms of a sketch stand in the order of the SMILES, hydrogens directly behind the atom that carries them.
  it("merges the hydrogens of methyl groups, and those of CH2 in an achiral molecule", () => {
    // Ethanol: C H H H C H H O H.
    expect(classLists(groupOf("CCO", true).classes())).toEqual([
      [1, 2, 3],
      [5, 6],
    ]);
  });

  it("keeps the hydrogens of CH2 apart in a chiral molecule, where they are diastereotopic", () => {
    // (R)-2-butanol: CH3 0-3, CH2 4-6, CH 7 8, OH 9 10, CH3 11-14.
    const group = groupOf("CC[C@@H](O)C", false);
    expect(classLists(group.classes())).toEqual([
      [1, 2, 3],
      [12, 13, 14],
    ]);
  });

  it("keeps the two methyl groups of an isopropyl group beside a stereocentre apart", () => {
    // 3-methylbutan-2-ol: CH3, CH, CH3, CH, OH, CH3.
    const group = groupOf("CC(C)[C@@H](O)C", false);
    expect(classLists(group.classes())).toHaveLength(3);
    // The same skeleton without a stereocentre merges them: 2-methylpropan-1-ol.
    expect(classLists(groupOf("CC(C)CO", true).classes())).toContainEqual([0, 6]);
  });

  it("pairs the hydrogens of two CH2 groups across the mirror of an achiral acetal, two and two", () => {
    // CH3-CH(OCH2CH3)2: the hydrogens of one CH2 are diastereotopic although the molecule is achiral.
    const group = groupOf("CC(OCC)OCC", true);
    const methylene = classLists(group.classes()).filter((list) => list.length === 2);
    // CH3 0-3, CH 4 5, O 6, CH2 7 8 9, CH3 10-13, O 14, CH2 15 16 17, CH3 18-21.
    expect(methylene).toContainEqual([6, 14]);
    const hydrogens = methylene.filter((list) => list.some((atom) => [8, 9].includes(atom)));
    expect(hydrogens).toHaveLength(2);
    for (const [one, other] of hydrogens) {
      expect([8, 9]).toContain(one);
      expect([16, 17]).toContain(other);
    }
  });

  it("tells the hydrogens of =CH2 apart by the sides of the double bond", () => {
    // Propene: =CH2 0 1 2, =CH 3 4, CH3 5-8. 2-Methylpropene has both sides alike.
    expect(classLists(groupOf("C=CC", true).classes())).toEqual([[6, 7, 8]]);
    expect(classLists(groupOf("C=C(C)C", true).classes())).toContainEqual([1, 2]);
  });

  it("gives the nine carbon signals of N-butyl-4-methylbenzenesulfonamide", () => {
    const { frames, graph } = readReference("ensembles/tosylamide.sdf", "ensembles/tosylamide");
    const group = new ParityGroup(graph, frames.block.positions.subarray(0, 96), true);
    const classes = group.classes();
    const carbons = new Set([...classes].filter((_, atom) => graph.elements[atom] === 6));
    expect(carbons.size).toBe(9);
    // The two oxygens of SO2, ortho and meta sides of the ring, each CH2 and CH3.
    expect(classLists(classes).map((list) => list.length)).toEqual([2, 2, 2, 3, 2, 2, 2, 2, 2, 3]);
  });

  it("keeps everything but methyl hydrogens apart in Ac-Ala-NHMe", () => {
    const { frames, graph } = readReference("ensembles/ac-ala-nhme.xyz", "ensembles/ac-ala-nhme");
    const group = new ParityGroup(graph, frames.block.positions.subarray(0, 66), false);
    expect(classLists(group.classes()).map((list) => list.length)).toEqual([3, 3, 3]);
  });
});

describe("tuples behind one signal", () => {
  const { frames, graph } = readReference("ensembles/tosylamide.sdf", "ensembles/tosylamide");
  const group = new ParityGroup(graph, frames.block.positions.subarray(0, 96), true);
  const at = (atom: number) => [...graph.neighbours.subarray(graph.offsets[atom]!, graph.offsets[atom + 1]!)];
  const hydrogens = (atom: number) => at(atom).filter((b) => graph.elements[b] === 1);
  const methyls = [...graph.elements.keys()].filter(
    (a) => graph.elements[a] === 6 && hydrogens(a).length === 3,
  );
  const aryl = [...graph.elements.keys()].filter(
    (a) => graph.elements[a] === 6 && at(a).length === 3 && hydrogens(a).length === 1,
  );

  it("counts three times two pairs between a methyl group and two ring sides", () => {
    const pairs = group.orbit([hydrogens(methyls[0]!)[0]!, hydrogens(aryl[0]!)[0]!]);
    expect(pairs).toHaveLength(6);
    expect(pairs![0]).toEqual([hydrogens(methyls[0]!)[0]!, hydrogens(aryl[0]!)[0]!]);
  });

  it("keeps bonded atoms bonded: one coupling of CH3-CH2 is six torsions", () => {
    const carbon = methyls.find((a) => at(a).some((b) => hydrogens(b).length === 2))!;
    const next = at(carbon).find((b) => graph.elements[b] === 6)!;
    expect(group.orbit([hydrogens(carbon)[0]!, carbon, next, hydrogens(next)[0]!])).toHaveLength(6);
  });
});

describe("frames numbered otherwise", () => {
  it("finds where the exchanged hydrogens of a chiral molecule stand, and leaves alone what is numbered alike", () => {
    const molecule = sketch("CC[C@@H](O)C");
    const graph = makeGraph(molecule.elements, molecule.bonds, molecule.isotopes);
    const positions = embed(molecule);
    const group = new ParityGroup(graph, positions, false);
    expect(group.relabelling(positions)).toBeNull();
    const exchanged = positions.slice();
    exchanged.set(positions.subarray(15, 18), 18);
    exchanged.set(positions.subarray(18, 21), 15);
    const map = group.relabelling(exchanged)!;
    expect([map[5], map[6]]).toEqual([6, 5]);
    expect([map[0], map[4], map[7]]).toEqual([0, 4, 7]);
  });

  it("takes the mirror image of an achiral molecule as numbered alike", () => {
    const molecule = sketch("CCO");
    const graph = makeGraph(molecule.elements, molecule.bonds, molecule.isotopes);
    const positions = embed(molecule);
    const group = new ParityGroup(graph, positions, true);
    expect(group.relabelling(positions.map((x) => -x))).toBeNull();
  });
});
