import { makeGraph } from "~/lib/structure";
import { ConformerDistances } from "~/lib/workbench/distances";
import type { DistanceAnswer, DistanceRequest } from "./distances-protocol";

/**
 * Distances among the conformers of the page, off its thread. One set at a time: a new `begin` forgets the last.
 * Work goes in slices, so that a newer question is heard before an old one is finished.
 */
const SLICE_MS = 40;

let set: ConformerDistances | null = null;
let latest = 0;
let column: { reference: number; next: number; rmsd: Float64Array; exact: Uint8Array } | null = null;
let running = false;

self.addEventListener("message", ({ data }: MessageEvent<DistanceRequest>) => {
  if (data.kind === "begin") {
    latest = data.id;
    column = null;
    const graph = makeGraph(Uint8Array.from(data.elements), data.bonds);
    set = new ConformerDistances(graph, data.options);
    return;
  }
  if (data.id !== latest || set === null) return;
  if (data.kind === "add") {
    const length = data.atoms * 3;
    for (let at = 0; at < data.positions.length; at += length) set.add(data.positions, at);
  } else {
    column = {
      reference: data.reference,
      next: 0,
      rmsd: new Float64Array(set.size),
      exact: new Uint8Array(set.size),
    };
  }
  run();
});

function run(): void {
  if (running) return;
  running = true;
  const turn = () => {
    const until = performance.now() + SLICE_MS;
    while (performance.now() < until && step()) {}
    running = column !== null;
    if (running) setTimeout(turn, 0);
  };
  setTimeout(turn, 0);
}

/** A little work; false where there is none. The column that the reader looks at comes first. */
function step(): boolean {
  if (set === null) return false;
  if (column !== null) {
    const { reference, next, rmsd, exact } = column;
    if (next < rmsd.length) {
      const found = set.between(reference, next);
      rmsd[next] = found.rmsd;
      exact[next] = found.exact ? 1 : 0;
      column.next += 1;
      if (column.next % 500 === 0) tell({ id: latest, reference, known: column.next, rmsd, exact });
    }
    if (column.next >= rmsd.length) {
      tell({ id: latest, reference, known: column.next, rmsd, exact });
      column = null;
    }
    return true;
  }
  return false;
}

function tell(answer: DistanceAnswer): void {
  self.postMessage(answer);
}
