import { superpose } from "../align/superpose.ts";
import { automorphismChain, type StabiliserChain } from "../chem/automorphisms.ts";
import { type Graph, selectAtoms } from "../structure.ts";

export type Positions = Float64Array | Float32Array;

export interface PlaceRequest {
  graph: Graph;
  /** Coordinates over which everything lies, the same over the life of a view. */
  anchor: Positions;
  /** Of the conformer that the others are compared with. */
  reference: Positions;
  moved: Positions;
  /** Atoms laid on each other, from 0, at least one. */
  atoms: Int32Array;
  /** Exchanges of equivalent atoms that may be tried for this structure. */
  tries: number;
}

/** Lays one structure over another; atoms keep their order. */
export type Placer = (request: PlaceRequest) => Float64Array;

/** Å of misfit in the aligned atoms that outweigh 1 Å in all the others: they only settle what is equal otherwise. */
const OTHERS_WEIGH = 0.02;
/** Bonds looked at in search of exchanges: a picture may not keep the page waiting. */
const WORK_LIMIT = 2_000_000;

/**
 * Superposition for the eye: the best proper rotation over chosen atoms (never a reflection: a mirror image stays one),
 * equivalent atoms exchanged where that brings the structures closer, since a ring that turned over is no difference.
 * The exchange is looked for once a structure, against the anchor, and is good but need not be the best; figures come
 * from elsewhere. The reference is laid over the anchor and the others over the reference.
 *
 * The placer remembers what it has laid over what: a slider changes populations, not places.
 */
export function createPlacer(): Placer {
  let exchanges = new WeakMap<Positions, Int32Array>();
  let molecule: { graph: Graph; anchor: Positions; atoms: string; chain: StabiliserChain } | null = null;
  let placed = new WeakMap<Positions, Float64Array>();
  let reference: Positions | null = null;
  return (request) => {
    const atoms = request.atoms.join(" ");
    const { graph } = request;
    if (
      molecule?.anchor !== request.anchor ||
      molecule.atoms !== atoms ||
      !sameGraph(molecule.graph, graph)
    ) {
      const chain = automorphismChain(graph, { subset: selectAtoms(graph, "heavy"), workLimit: WORK_LIMIT });
      molecule = { graph, anchor: request.anchor, atoms, chain };
      exchanges = new WeakMap();
      reference = null;
    }
    const { chain } = molecule;
    const exchangeOf = (positions: Positions) => {
      const found = exchanges.get(positions) ?? bestExchange(chain, request, positions);
      exchanges.set(positions, found);
      return found;
    };
    if (reference !== request.reference) {
      const turned = exchangeOf(request.reference);
      placed = new WeakMap();
      placed.set(request.reference, laidOver(request.anchor, request.reference, request.atoms, null, turned));
      reference = request.reference;
    }
    const known = placed.get(request.moved);
    if (known) return known;
    const target = placed.get(request.reference)!;
    const own = exchangeOf(request.moved);
    const result = laidOver(target, request.moved, request.atoms, exchanges.get(request.reference)!, own);
    placed.set(request.moved, result);
    return result;
  };
}

/** Atom a of the anchor is fixedOf[a] in the fixed structure and movedOf[a] in the moved one. */
function laidOver(
  fixed: Positions,
  moved: Positions,
  atoms: Int32Array,
  fixedOf: Int32Array | null,
  movedOf: Int32Array,
): Float64Array {
  const partner = Int32Array.from({ length: moved.length / 3 }, (_, a) => a);
  const chosen = atoms.map((a) => (fixedOf ? fixedOf[a]! : a));
  chosen.forEach((at, k) => {
    partner[at] = movedOf[atoms[k]!]!;
  });
  return superpose(doubles(fixed), doubles(moved), { atoms: chosen, permutation: partner }).positions;
}

/** The best of the exchanges that can be tried: all of them where they are few, else level by level of the chain. */
function bestExchange(chain: StabiliserChain, request: PlaceRequest, moved: Positions): Int32Array {
  const identity = Int32Array.from({ length: moved.length / 3 }, (_, a) => a);
  if (moved === request.anchor || chain.order === 1) return identity;
  const anchor = doubles(request.anchor);
  const own = doubles(moved);
  let best: { exchange: Int32Array; cost: number } = {
    exchange: identity,
    cost: misfit(request, anchor, own, identity),
  };
  let left = request.tries - 1;
  const attempt = (exchange: Int32Array) => {
    left--;
    const cost = misfit(request, anchor, own, exchange);
    if (cost < best.cost - 1e-9) best = { exchange, cost };
  };
  if (chain.order <= request.tries) {
    for (const exchange of products(chain, 0, identity)) attempt(exchange);
    return best.exchange;
  }
  for (const { transversal } of chain.levels) {
    const from = best.exchange;
    for (const step of transversal.slice(1)) if (left > 0) attempt(after(from, step));
  }
  return best.exchange;
}

function* products(chain: StabiliserChain, level: number, sofar: Int32Array): Generator<Int32Array> {
  const here = chain.levels[level];
  if (!here) yield sofar;
  else for (const step of here.transversal) yield* products(chain, level + 1, after(sofar, step));
}

/** First `step`, then `exchange`. */
function after(exchange: Int32Array, step: Int32Array): Int32Array {
  return step.map((image) => exchange[image]!);
}

function misfit(
  request: PlaceRequest,
  anchor: Float64Array,
  moved: Float64Array,
  exchange: Int32Array,
): number {
  const { positions, rmsd } = superpose(anchor, moved, { atoms: request.atoms, permutation: exchange });
  let sum = 0;
  let count = 0;
  request.graph.elements.forEach((z, a) => {
    if (z <= 1) return;
    const b = exchange[a]!;
    for (let i = 0; i < 3; i++) sum += (anchor[3 * a + i]! - positions[3 * b + i]!) ** 2;
    count++;
  });
  return rmsd + OTHERS_WEIGH * Math.sqrt(sum / Math.max(1, count));
}

function sameGraph(a: Graph, b: Graph): boolean {
  return a === b || (equal(a.elements, b.elements) && equal(a.bonds, b.bonds));
}

function equal(a: ArrayLike<number>, b: ArrayLike<number>): boolean {
  if (a.length !== b.length) return false;
  for (let k = 0; k < a.length; k++) if (a[k] !== b[k]) return false;
  return true;
}

function doubles(positions: Positions): Float64Array {
  return positions instanceof Float64Array ? positions : Float64Array.from(positions);
}
