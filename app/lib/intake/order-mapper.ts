import { graphSignature, isomorphism } from "../chem/signature.ts";
import type { Graph } from "../structure.ts";
import type { BondKind } from "./frame-kinds.ts";

/** So many bond sets are tried; a file with more orders than these is no ensemble. */
const MOST_KINDS = 1000;

/** Finds how the atoms of a frame stand in the group's order, where it is the same molecule (rows X13, S22). */
export class OrderMapper {
  private readonly known = new Map<BondKind, Int32Array | null>();
  private readonly signature: string;
  private tried = 0;

  constructor(readonly graph: Graph) {
    this.signature = graphSignature(graph);
  }

  /**
   * @returns the frame's atom for every atom of the group; null where the frame has the group's order already, or is
   *   another molecule
   */
  mapping(kind: BondKind): Int32Array | null {
    let found = this.known.get(kind);
    if (found === undefined) {
      found = this.find(kind.graph);
      this.known.set(kind, found);
    }
    return found;
  }

  private find(frame: Graph): Int32Array | null {
    const { graph } = this;
    if (frame.elements.length !== graph.elements.length || this.tried >= MOST_KINDS) return null;
    if (graphSignature(frame) !== this.signature) return null;
    if (hasOrder(graph, frame) && frame.bonds.every((atom, k) => atom === graph.bonds[k])) return null;
    this.tried += 1;
    return isomorphism(graph, frame);
  }
}

function hasOrder(a: Graph, b: Graph): boolean {
  return (
    a.elements.every((z, k) => z === b.elements[k]) && a.isotopes.every((mass, k) => mass === b.isotopes[k])
  );
}
