import type { Graph } from "../structure.ts";

/** Neighbours of an atom, ascending. */
export function neighboursOf(graph: Graph, atom: number): Int32Array {
  return graph.neighbours.subarray(graph.offsets[atom]!, graph.offsets[atom + 1]!);
}

/** Number of bonds of an atom. */
export function degreeOf(graph: Graph, atom: number): number {
  return graph.offsets[atom + 1]! - graph.offsets[atom]!;
}

/**
 * The fragment of every atom, numbered from 0 in the order of their first atoms; dummies get -1.
 *
 * @example fragmentsOf(twoWaters) // 0 0 0 1 1 1
 */
export function fragmentsOf(graph: Graph): Int32Array {
  const fragment = new Int32Array(graph.elements.length).fill(-1);
  let count = 0;
  for (let a = 0; a < fragment.length; a++) {
    if (fragment[a] !== -1 || graph.elements[a] === 0) continue;
    const queue = [a];
    fragment[a] = count;
    for (let at = queue.pop(); at !== undefined; at = queue.pop()) {
      for (const b of neighboursOf(graph, at)) {
        if (fragment[b] !== -1) continue;
        fragment[b] = count;
        queue.push(b);
      }
    }
    count += 1;
  }
  return fragment;
}

/**
 * Atoms reached from `start` without passing through `without`: a branch, when the bond between them is in no ring.
 */
export function branchOf(graph: Graph, start: number, without: number): number[] {
  const seen = new Set([without, start]);
  const branch = [start];
  for (let k = 0; k < branch.length; k++) {
    for (const b of neighboursOf(graph, branch[k]!)) {
      if (seen.has(b)) continue;
      seen.add(b);
      branch.push(b);
    }
  }
  return branch;
}

/**
 * Fewest bonds from `a` to `b` on a way that does not use the bond a-b nor the atom `without`; Infinity if there is
 * none. One more is the size of the smallest ring of the bond a-b.
 */
export function wayAround(graph: Graph, a: number, b: number, without = -1): number {
  const steps = new Map([[a, 0]]);
  const queue = [a];
  for (let k = 0; k < queue.length; k++) {
    const at = queue[k]!;
    const next = (steps.get(at) ?? 0) + 1;
    for (const to of neighboursOf(graph, at)) {
      if (to === without || steps.has(to) || (at === a && to === b)) continue;
      if (to === b) return next;
      steps.set(to, next);
      queue.push(to);
    }
  }
  return Infinity;
}

/** True when the bond a-b lies in a ring. */
export function inRing(graph: Graph, a: number, b: number): boolean {
  return degreeOf(graph, a) > 1 && degreeOf(graph, b) > 1 && wayAround(graph, a, b) < Infinity;
}
