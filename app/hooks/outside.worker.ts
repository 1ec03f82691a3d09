import { OutsideComparer } from "~/lib/outside/compare-outside";
import { makeGraph } from "~/lib/structure";
import type { OutsideQuestion } from "./outside-protocol";

/** Nodes that one comparison may cost. */
const NODE_LIMIT = 20_000;

/** One question, one answer; whoever asks another ends this thread. */
self.addEventListener("message", ({ data }: MessageEvent<OutsideQuestion>) => {
  const { elements, bonds, outside, atoms, positions } = data;
  const graph = makeGraph(Uint8Array.from(elements), bonds);
  const comparer = new OutsideComparer(graph, outside, atoms, NODE_LIMIT);
  const count = positions.length / (3 * elements.length);
  self.postMessage(comparer.compare({ atoms: elements.length, count, positions }));
});
