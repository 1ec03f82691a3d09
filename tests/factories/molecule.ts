import { perceiveBonds } from "../../app/lib/chem/bonds.ts";
import { type Graph, makeGraph } from "../../app/lib/structure.ts";
import { embed } from "./embed.ts";
import { type Sketch, sketch } from "./smiles.ts";

export interface Molecule {
  sketch: Sketch;
  graph: Graph;
  positions: Float64Array;
}

/** A molecule with rough coordinates, whose bonds by distance are those of the SMILES. */
export function molecule(smiles: string, seed = 1): Molecule {
  const drawn = sketch(smiles);
  const graph = makeGraph(drawn.elements, drawn.bonds, drawn.isotopes);
  for (let k = 0; k < 20; k++) {
    const positions = embed(drawn, seed + 50 * k);
    const found = perceiveBonds(drawn.elements, positions);
    if (found.bonds.join() === graph.bonds.join() && found.contested.length === 0) {
      return { sketch: drawn, graph, positions };
    }
  }
  throw new Error(`No geometry of ${smiles} has its bonds.`);
}

/** Mirror image through the origin. */
export const mirrored = (positions: Float64Array): Float64Array => positions.map((x) => -x);

/** The same molecule with atom a called order[a]. */
export function renamed(m: Molecule, order: readonly number[]): Molecule {
  const elements = new Uint8Array(order.length);
  const isotopes = new Uint16Array(order.length);
  const positions = new Float64Array(3 * order.length);
  order.forEach((to, from) => {
    elements[to] = m.graph.elements[from]!;
    isotopes[to] = m.graph.isotopes[from]!;
    positions.set(m.positions.subarray(3 * from, 3 * from + 3), 3 * to);
  });
  const graph = makeGraph(
    elements,
    Array.from(m.graph.bonds, (a) => order[a]!),
    isotopes,
  );
  return { sketch: m.sketch, graph, positions };
}
