import { perceiveBondOrders } from "../chem/bond-orders.ts";
import type { Graph } from "../structure.ts";
import { AROMATIC } from "./bond-types.ts";

/** What a bond table says of one molecule; `SdfFrame` has it, numbered as its frame. */
export interface StatedOrders {
  /** Pairs i < j, sorted, flat. */
  readonly bonds: ArrayLike<number>;
  /** Bond types of the format. */
  readonly orders: ArrayLike<number> | null;
  readonly charges: ArrayLike<number> | null;
  readonly radicals: ArrayLike<number> | null;
}

/** Orders of a graph's bonds, with the charges and radicals that go with them. */
export interface BondOrders {
  /** 1, 2, 3, 4 (aromatic) or 9 (coordination) for each bond of the graph, in its order. */
  readonly orders: ArrayLike<number>;
  /** Null where all are 0. */
  readonly charges: ArrayLike<number> | null;
  readonly radicals: ArrayLike<number> | null;
  /** "unknown" where neither the file nor the valences give any: then all are 1 and mean nothing. */
  readonly origin: "file" | "perceived" | "unknown";
}

/**
 * Bond orders for drawings and exports: those of the file where its bonds are those of the graph, which come from the
 * distances, else by valence. They never enter identity or RMSD.
 *
 * @example bondOrders(graph, null).origin // "perceived"
 */
export function bondOrders(graph: Graph, stated: StatedOrders | null): BondOrders {
  const orders = stated && statedOrders(graph, stated);
  if (stated && orders) {
    const { charges, radicals } = stated;
    return { orders, charges, radicals, origin: "file" };
  }
  const perceived = perceiveBondOrders(graph.elements, graph.bonds);
  if (perceived) {
    const charges = perceived.charges.some((charge) => charge !== 0) ? perceived.charges : null;
    return { orders: perceived.orders, charges, radicals: null, origin: "perceived" };
  }
  const single = new Uint8Array(graph.bonds.length / 2).fill(1);
  return { orders: single, charges: null, radicals: null, origin: "unknown" };
}

/**
 * Orders of a graph's bonds as a file states them; null where it states none, or where file and graph differ in a bond.
 * What the file calls coordination or hydrogen bond may be missing in the graph.
 */
export function statedOrders(graph: Graph, stated: StatedOrders): Uint8Array | null {
  const { bonds, orders } = stated;
  if (orders === null) return null;
  const own = new Uint8Array(graph.bonds.length / 2);
  let at = 0;
  for (let k = 0; k < orders.length; k++) {
    const here = graph.bonds[2 * at] === bonds[2 * k] && graph.bonds[2 * at + 1] === bonds[2 * k + 1];
    if (here) own[at++] = orders[k]!;
    else if (orders[k]! <= AROMATIC) return null;
  }
  return at === own.length ? own : null;
}
