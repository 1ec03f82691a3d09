import { Molecule } from "openchemlib";
import { describe, expect, test } from "vitest";
import { impliedHydrogens } from "./implied-hydrogens.ts";

/** The heavy atoms of a SMILES, by openchemlib, which counts the hydrogens that we must find. */
function skeleton(smiles: string) {
  const molecule = Molecule.fromSmiles(smiles);
  const atoms = Array.from({ length: molecule.getAllAtoms() }, (_, a) => a);
  const bonds: number[] = [];
  const types: number[] = [];
  for (let b = 0; b < molecule.getAllBonds(); b++) {
    bonds.push(molecule.getBondAtom(0, b), molecule.getBondAtom(1, b));
    types.push(molecule.getBondOrder(b));
  }
  return {
    table: {
      elements: atoms.map((a) => molecule.getAtomicNo(a)),
      bonds,
      types,
      charges: atoms.map((a) => molecule.getAtomCharge(a)),
      radicals: null,
      valences: null,
    },
    hydrogens: atoms.map((a) => molecule.getImplicitHydrogens(a)),
  };
}

describe("hydrogens without coordinates, as openchemlib counts them", () => {
  test.each([
    "C",
    "CCO",
    "C=O",
    "CC#N",
    "c1ccccc1",
    "c1ccncc1",
    "c1cc[nH]c1",
    "c1ccsc1",
    "CC(=O)[O-]",
    "C[NH3+]",
    "C[N+](C)(C)C",
    "[O-][N+](=O)c1ccccc1",
    "CS(=O)(=O)N",
    "CS(C)=O",
    "COP(=O)(OC)O",
    "CP(C)C",
    "CBr",
    "OCl",
    "OB(O)O",
    "C[Si](C)(C)O",
    "C[O+](C)C",
    "[NH2-]",
    "[CH3-]",
    "FC(F)(F)I",
    "C[Se]C",
    "[BH4-]",
    "C[As](C)C",
    "OCl(=O)(=O)=O",
    "[Na+].[Cl-]",
    "NCC(=O)NC",
  ])("%s", (smiles) => {
    const { table, hydrogens } = skeleton(smiles);
    const implied = impliedHydrogens(table);
    expect([...implied.counts]).toEqual(hydrogens);
    expect(implied.total).toBe(hydrogens.reduce((sum, count) => sum + count, 0));
  });
});

const carbon = (charge: number, radical: number, valence = -1) =>
  impliedHydrogens({
    elements: [6, 1, 1],
    bonds: [0, 1, 0, 2],
    types: [1, 1],
    charges: [charge, 0, 0],
    radicals: [radical, 0, 0],
    valences: [valence, -1, -1],
  }).total;

test("charges, radicals and a stated valence take the place of hydrogens", () => {
  expect([carbon(0, 0), carbon(1, 0), carbon(-1, 0)]).toEqual([2, 1, 1]);
  expect([carbon(0, 1), carbon(0, 2), carbon(0, 3)]).toEqual([0, 1, 0]);
  expect([carbon(0, 0, 2), carbon(0, 0, 3), carbon(0, 0, 0)]).toEqual([0, 1, 0]);
});

test("atoms that have several valences leave it open whether a charge is missing", () => {
  const ammonium = {
    elements: [7, 1, 1, 1, 1],
    bonds: [0, 1, 0, 2, 0, 3, 0, 4],
    types: [1, 1, 1, 1],
    charges: null,
    radicals: null,
    valences: null,
  };
  expect(impliedHydrogens(ammonium)).toMatchObject({ total: 1, certain: false });
});

test("aromatic bonds count one and a half, and close no valence that they leave open", () => {
  const ring = (elements: number[]) => ({
    elements,
    bonds: elements.flatMap((_, k) => [k, (k + 1) % elements.length]),
    types: elements.map(() => 4),
    charges: null,
    radicals: null,
    valences: null,
  });
  expect(impliedHydrogens(ring([6, 6, 6, 6, 6, 6])).total).toBe(6);
  expect(impliedHydrogens(ring([7, 6, 6, 6, 6, 6])).total).toBe(5);
  // Of pyrrole's nitrogen the ring does not say whether it carries a hydrogen.
  expect(impliedHydrogens(ring([7, 6, 6, 6, 6])).total).toBe(4);
  expect(impliedHydrogens(ring([16, 6, 6, 6, 6])).total).toBe(4);
});
