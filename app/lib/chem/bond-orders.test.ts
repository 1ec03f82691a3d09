import { Molecule } from "openchemlib";
import { describe, expect, test } from "vitest";
import { perceiveBondOrders } from "./bond-orders.ts";

/** Elements and bonds of a SMILES with every hydrogen, read by openchemlib, which knows the orders we must find. */
function bare(smiles: string) {
  const molecule = Molecule.fromSmiles(smiles);
  molecule.addImplicitHydrogens();
  const elements = Array.from({ length: molecule.getAllAtoms() }, (_, a) => molecule.getAtomicNo(a));
  const bonds: number[] = [];
  for (let b = 0; b < molecule.getAllBonds(); b++)
    bonds.push(molecule.getBondAtom(0, b), molecule.getBondAtom(1, b));
  return { elements, bonds };
}

/** Canonical code of the molecule that the perceived orders make. */
function codeOf(elements: number[], bonds: number[]): string | null {
  const found = perceiveBondOrders(elements, bonds);
  if (found === null) return null;
  const molecule = new Molecule(elements.length, bonds.length / 2);
  for (const [atom, z] of elements.entries()) {
    molecule.addAtom(z);
    molecule.setAtomCharge(atom, found.charges[atom]!);
  }
  for (let b = 0; b < bonds.length / 2; b++) {
    const bond = molecule.addBond(bonds[2 * b]!, bonds[2 * b + 1]!);
    molecule.setBondOrder(bond, found.orders[b]!);
  }
  return molecule.getIDCode();
}

describe("orders agree with openchemlib's reading of the SMILES, resonance forms taken as one", () => {
  test.each([
    ["formaldehyde", "C=O"],
    ["acetonitrile", "CC#N"],
    ["1,2-difluoroethane", "FCCF"],
    ["N-butyl-4-methylbenzenesulfonamide", "CCCCNS(=O)(=O)c1ccc(C)cc1"],
    ["N-acetylalanine N-methylamide", "CC(=O)NC(C)C(=O)NC"],
    ["aryl ether", "CC(C)(C)c1ccc(Oc2ccc(C(F)(F)F)cc2)cc1"],
    ["amino ester", "CCCCOc1ccc(cc1)C(=O)OCCN(C)C"],
    ["naphthalene", "c1ccc2ccccc2c1"],
    ["indole", "c1ccc2[nH]ccc2c1"],
    ["caffeine", "Cn1cnc2c1c(=O)n(C)c(=O)n2C"],
    ["thiophene", "c1ccsc1"],
    ["dimethyl sulfoxide", "CS(C)=O"],
    ["trimethyl phosphate", "COP(=O)(OC)OC"],
    ["nitrobenzene", "[O-][N+](=O)c1ccccc1"],
    ["pyridine N-oxide", "[O-][n+]1ccccc1"],
    ["phenyl azide", "[N-]=[N+]=Nc1ccccc1"],
    ["diazomethane", "C=[N+]=[N-]"],
    ["glycine, zwitterion", "[NH3+]CC([O-])=O"],
    ["acetate", "CC([O-])=O"],
    ["tetramethylammonium", "C[N+](C)(C)C"],
    ["buta-1,3-diyne", "C#CC#C"],
    ["allene", "C=C=C"],
    ["carbon dioxide", "O=C=O"],
    ["pyrene, no branching for long", "c1cc2ccc3cccc4ccc(c1)c2c34"],
    ["chlorobenzene", "Clc1ccccc1"],
  ])("%s", (_, smiles) => {
    const { elements, bonds } = bare(smiles);
    const reference = Molecule.fromSmiles(smiles);
    reference.addImplicitHydrogens();
    expect(codeOf(elements, bonds)).toBe(reference.getIDCode());
  });
});

test("where no valence fits nothing is claimed", () => {
  // CH3 as a closed shell does not exist.
  expect(perceiveBondOrders([6, 1, 1, 1], [0, 1, 0, 2, 0, 3])).toBeNull();
  expect(perceiveBondOrders([6, 1, 1, 1, 1, 1], [0, 1, 0, 2, 0, 3, 0, 4, 0, 5])).toBeNull();
});

test("unknown elements keep single bonds", () => {
  expect(perceiveBondOrders([30, 6, 1, 1, 1], [0, 1, 1, 2, 1, 3, 1, 4])?.orders).toEqual(
    Uint8Array.of(1, 1, 1, 1),
  );
});
