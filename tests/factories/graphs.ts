import { type Graph, makeGraph } from "../../app/lib/structure.ts";

/** Small molecular graphs for tests: bonds only, no geometry. */

const ATOMIC_NUMBER: Record<string, number> = { H: 1, B: 5, C: 6, N: 7, O: 8, F: 9, P: 15, S: 16 };
const VALENCE: Record<number, number> = { 5: 3, 6: 4, 7: 3, 8: 2, 9: 1, 15: 3, 16: 2 };

/** A graph from symbols and bond pairs, without any hydrogen added. */
export function plainGraph(
  symbols: string | readonly string[],
  bonds: readonly (readonly [number, number])[],
): Graph {
  const list = typeof symbols === "string" ? [...symbols] : symbols;
  return makeGraph(
    Uint8Array.from(list, (s) => ATOMIC_NUMBER[s]!),
    bonds.flat(),
  );
}

/**
 * A graph with hydrogens filled up to the usual valence.
 *
 * @param double bonds that count twice (or an atom of higher valence than usual)
 */
export function withHydrogens(
  symbols: string | readonly string[],
  bonds: readonly (readonly [number, number])[],
  double: readonly (readonly [number, number])[] = [],
): Graph {
  const list = typeof symbols === "string" ? [...symbols] : [...symbols];
  const elements = list.map((s) => ATOMIC_NUMBER[s]!);
  const flat = bonds.flat();
  const used = elements.map(() => 0);
  for (const a of [...flat, ...double.flat()]) used[a]! += 1;
  for (let a = 0; a < list.length; a++) {
    for (let k = used[a]!; k < (VALENCE[elements[a]!] ?? 0); k++) {
      flat.push(a, elements.length);
      elements.push(1);
    }
  }
  return makeGraph(Uint8Array.from(elements), flat);
}

export function ring(atoms: number, first = 0): [number, number][] {
  return Array.from({ length: atoms }, (_, k) => [first + k, first + ((k + 1) % atoms)]);
}

export function chain(atoms: number, first = 0): [number, number][] {
  return Array.from({ length: atoms - 1 }, (_, k) => [first + k, first + k + 1]);
}

/** The 60 vertices of the truncated icosahedron: corner (v, w) of vertex v towards its neighbour w. */
export function c60(): Graph {
  const icosahedron = icosahedronNeighbours();
  const index = new Map<string, number>();
  icosahedron.forEach((row, v) => {
    for (const w of row) index.set(`${v},${w}`, index.size);
  });
  const bonds: [number, number][] = [];
  icosahedron.forEach((row, v) => {
    for (const w of row) {
      if (v < w) bonds.push([index.get(`${v},${w}`)!, index.get(`${w},${v}`)!]);
      // Pentagon around v: corners towards w and u are joined where w and u are neighbours.
      for (const u of row) {
        if (w < u && icosahedron[w]!.includes(u))
          bonds.push([index.get(`${v},${w}`)!, index.get(`${v},${u}`)!]);
      }
    }
  });
  return plainGraph("C".repeat(60), bonds);
}

function icosahedronNeighbours(): number[][] {
  const golden = (1 + Math.sqrt(5)) / 2;
  const points: number[][] = [];
  for (const a of [-1, 1]) {
    for (const b of [-golden, golden]) points.push([0, a, b], [a, b, 0], [b, 0, a]);
  }
  const distance2 = (p: number[], q: number[]) => p.reduce((sum, x, k) => sum + (x - q[k]!) ** 2, 0);
  return points.map((p) => points.flatMap((q, k) => (Math.abs(distance2(p, q) - 4) < 1e-9 ? [k] : [])));
}

/** Dodecahedrane C20H20: carbons are the faces of the icosahedron. */
export function dodecahedrane(): Graph {
  const near = icosahedronNeighbours();
  const faces: number[][] = [];
  for (let a = 0; a < 12; a++) {
    for (const b of near[a]!) {
      for (const c of near[b]!) if (a < b && b < c && near[a]!.includes(c)) faces.push([a, b, c]);
    }
  }
  const bonds: [number, number][] = [];
  faces.forEach((one, i) => {
    faces.forEach((other, j) => {
      if (i < j && one.filter((v) => other.includes(v)).length === 2) bonds.push([i, j]);
    });
  });
  return withHydrogens("C".repeat(20), bonds);
}

export function cubane(): Graph {
  const bonds: [number, number][] = [];
  for (let a = 0; a < 8; a++) for (const bit of [1, 2, 4]) if (!(a & bit)) bonds.push([a, a | bit]);
  return withHydrogens("C".repeat(8), bonds);
}

export function adamantane(): Graph {
  // CH 0..3, CH2 4..9 between each two of them.
  const bonds: [number, number][] = [];
  let next = 4;
  for (let a = 0; a < 4; a++) {
    for (let b = a + 1; b < 4; b++) {
      bonds.push([a, next], [next, b]);
      next++;
    }
  }
  return withHydrogens("C".repeat(10), bonds);
}

/** The graph with atom a renamed to names[a]. */
export function relabelled(graph: Graph, names: ArrayLike<number>): Graph {
  const elements = new Uint8Array(graph.elements.length);
  const isotopes = new Uint16Array(graph.elements.length);
  graph.elements.forEach((z, a) => {
    elements[names[a]!] = z;
    isotopes[names[a]!] = graph.isotopes[a]!;
  });
  return makeGraph(
    elements,
    Array.from(graph.bonds, (a) => names[a]!),
    isotopes,
  );
}
