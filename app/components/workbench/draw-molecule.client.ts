import { Molecule } from "openchemlib";
import { perceiveBondOrders } from "~/lib/chem/bond-orders";
import { type FlatAtom, type FlatBond, innerSide } from "~/lib/workbench/flat-layout";

export interface FlatMolecule {
  atoms: FlatAtom[];
  bonds: FlatBond[];
  /** Where the orders come from; "unknown" where no valence structure was found: then the plain graph is drawn. */
  orders: "file" | "perceived" | "unknown";
}

/**
 * Lays a molecule out on paper. Bond orders are those of the file, else perceived by valence; the configuration is taken
 * from the coordinates.
 *
 * @param table orders and charges as the file states them
 * @param positions packed x, y, z of one frame, or null for a drawing without configuration
 */
export function drawMolecule(
  elements: readonly number[],
  bonds: readonly number[],
  positions: Float64Array | null,
  table: { orders: readonly number[]; charges: readonly number[] } | null = null,
): FlatMolecule | null {
  // Aromatic and coordination bonds have no place on paper: there the valences say which are double.
  const stated = table?.orders.every((order) => order <= 3) ? table : null;
  const known = stated ?? perceiveBondOrders(elements, bonds);
  const molecule = new Molecule(elements.length, bonds.length / 2);
  for (const [k, element] of elements.entries()) {
    molecule.addAtom(element);
    molecule.setAtomCharge(k, known?.charges[k] ?? 0);
    if (positions === null) continue;
    // A half turn about x: the library counts y downward, and handedness must be kept.
    molecule.setAtomX(k, positions[3 * k] ?? 0);
    molecule.setAtomY(k, -(positions[3 * k + 1] ?? 0));
    molecule.setAtomZ(k, -(positions[3 * k + 2] ?? 0));
  }
  for (let b = 0; b < bonds.length / 2; b++) {
    const bond = molecule.addBond(bonds[2 * b] ?? 0, bonds[2 * b + 1] ?? 0);
    molecule.setBondOrder(bond, known?.orders[b] ?? 1);
  }
  molecule.ensureHelperArrays(Molecule.cHelperParities);
  molecule.removeExplicitHydrogens();
  molecule.inventCoordinates();
  molecule.ensureHelperArrays(Molecule.cHelperNeighbours);
  return read(molecule, stated ? "file" : known ? "perceived" : "unknown");
}

function read(molecule: Molecule, orders: FlatMolecule["orders"]): FlatMolecule | null {
  const count = molecule.getAllAtoms();
  if (count < 2) return null;
  const atoms: FlatAtom[] = Array.from({ length: count }, (_, k) => ({
    element: molecule.getAtomicNo(k),
    x: molecule.getAtomX(k),
    y: molecule.getAtomY(k),
    hydrogens: orders !== "unknown" ? molecule.getAllHydrogens(k) : 0,
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
  return { atoms, bonds, orders };
}
