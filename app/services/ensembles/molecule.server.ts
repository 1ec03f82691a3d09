import { type Graph, makeGraph } from "../../lib/structure.ts";

/** Elements and isotopes as a row of `ensembles` keeps them: one byte an atom, then a little-endian uint16 an atom. */
export function packElements(elements: Uint8Array, isotopes: Uint16Array): Buffer {
  const packed = Buffer.alloc(3 * elements.length);
  packed.set(elements);
  for (const [atom, mass] of isotopes.entries()) packed.writeUInt16LE(mass, elements.length + 2 * atom);
  return packed;
}

/** Bonds as flat pairs of little-endian int32. */
export function packBonds(bonds: Int32Array): Buffer {
  const packed = Buffer.alloc(4 * bonds.length);
  for (const [k, atom] of bonds.entries()) packed.writeInt32LE(atom, 4 * k);
  return packed;
}

/** The molecule of an ensemble from its row. */
export function unpackMolecule(row: { atoms: number; elements: Buffer; bonds: Buffer }): Graph {
  const { atoms } = row;
  const elements = Uint8Array.from(row.elements.subarray(0, atoms));
  const isotopes = Uint16Array.from({ length: atoms }, (_, atom) =>
    row.elements.readUInt16LE(atoms + 2 * atom),
  );
  const bonds = Array.from({ length: row.bonds.length / 4 }, (_, k) => row.bonds.readInt32LE(4 * k));
  return makeGraph(elements, bonds, isotopes);
}
