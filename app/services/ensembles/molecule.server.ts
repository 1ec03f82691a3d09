import type { ensembles } from "../../db/schema.server.ts";
import { type BondOrders, bondOrders } from "../../lib/sdf/orders.ts";
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

/** Orders of the ensemble's bonds: those of its file or SMILES, else by valence. */
export function ordersOf(row: Pick<typeof ensembles.$inferSelect, "bondTable">, graph: Graph): BondOrders {
  const table = row.bondTable;
  if (table === null || table.orders.length !== graph.bonds.length / 2) return bondOrders(graph, null);
  const marked = (values: number[]) => (values.some((value) => value !== 0) ? values : null);
  return {
    orders: table.orders,
    charges: marked(table.charges),
    radicals: marked(table.radicals),
    origin: "file",
  };
}
