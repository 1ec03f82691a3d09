import { Molecule } from "openchemlib";
import { perceiveBondOrders } from "~/lib/chem/bond-orders";
import { type FlatAtom, type FlatBond, innerSide } from "~/lib/workbench/flat-layout";

export interface FlatMolecule {
  atoms: FlatAtom[];
  bonds: FlatBond[];
  /** False where no valence structure was found: then the plain graph is drawn. */
  ordersPerceived: boolean;
}

/**
 * Lays a molecule out on paper. Bond orders are perceived by valence, the configuration is taken from the coordinates.
 *
 * @param positions packed x, y, z of one frame, or null for a drawing without configuration
 */
export function drawMolecule(
  elements: readonly number[],
  bonds: readonly number[],
  positions: Float64Array | null,
): FlatMolecule | null {
  const perceived = perceiveBondOrders(elements, bonds);
  const molecule = new Molecule(elements.length, bonds.length / 2);
  for (const [k, element] of elements.entries()) {
    molecule.addAtom(element);
    molecule.setAtomCharge(k, perceived?.charges[k] ?? 0);
    if (positions === null) continue;
    // A half turn about x: the library counts y downward, and handedness must be kept.
    molecule.setAtomX(k, positions[3 * k] ?? 0);
    molecule.setAtomY(k, -(positions[3 * k + 1] ?? 0));
    molecule.setAtomZ(k, -(positions[3 * k + 2] ?? 0));
  }
  for (let b = 0; b < bonds.length / 2; b++) {
    const bond = molecule.addBond(bonds[2 * b] ?? 0, bonds[2 * b + 1] ?? 0);
    molecule.setBondOrder(bond, perceived?.orders[b] ?? 1);
  }
  molecule.ensureHelperArrays(Molecule.cHelperParities);
  molecule.removeExplicitHydrogens();
  molecule.inventCoordinates();
  molecule.ensureHelperArrays(Molecule.cHelperNeighbours);
  return read(molecule, perceived !== null);
}

function read(molecule: Molecule, ordersPerceived: boolean): FlatMolecule | null {
  const count = molecule.getAllAtoms();
  if (count < 2) return null;
  const atoms: FlatAtom[] = Array.from({ length: count }, (_, k) => ({
    element: molecule.getAtomicNo(k),
    x: molecule.getAtomX(k),
    y: molecule.getAtomY(k),
    hydrogens: ordersPerceived ? molecule.getAllHydrogens(k) : 0,
    charge: molecule.getAtomCharge(k),
  }));
  const pairs = Array.from({ length: molecule.getAllBonds() }, (_, b) => ({
    from: molecule.getBondAtom(0, b),
    to: molecule.getBondAtom(1, b),
  }));
  const bonds = pairs.map(({ from, to }, b): FlatBond => {
    const type = molecule.getBondType(b);
    const order = Math.min(3, Math.max(1, molecule.getBondOrder(b)));
    return {
      from,
      to,
      order: order === 2 ? 2 : order === 3 ? 3 : 1,
      wedge: type === Molecule.cBondTypeUp ? "up" : type === Molecule.cBondTypeDown ? "down" : null,
      inner: order === 2 ? innerSide(atoms, pairs, b) : 0,
    };
  });
  return { atoms, bonds, ordersPerceived };
}
