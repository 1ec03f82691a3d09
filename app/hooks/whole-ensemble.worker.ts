import { type AcceptedData, unpackAccepted } from "~/lib/accepted-data";
import { NearnessWork } from "~/lib/align/nearness";
import { makePlan } from "~/lib/align/plan";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import { runSift } from "~/lib/recipe/run";
import { countAgainstTolerance } from "~/lib/sift/count-against-tolerance";
import { type Graph, makeGraph } from "~/lib/structure";
import type { WholeAnswer, WholeQuestion } from "./whole-ensemble-protocol";

/**
 * Questions about all accepted frames, off the page's thread, with the functions that the server runs. Of each kind the
 * newest question counts; the search among the kept conformers goes in slices, so that newer ones are heard.
 */
const SLICE_MS = 40;
/** Nodes that one comparison may cost: a list must not hang on a single pair. */
const NODE_LIMIT = 20_000;

type Asked<Kind extends WholeQuestion["kind"]> = Extract<WholeQuestion, { kind: Kind }>;

let data: AcceptedData | null = null;
let graph: Graph | null = null;
let kcalPerUnit: number | null = null;
let count: Asked<"count"> | null = null;
let plateau: Asked<"plateau"> | null = null;
let nearness: { asked: Asked<"nearness">; work: NearnessWork } | null = null;
let running = false;

self.addEventListener("message", ({ data: asked }: MessageEvent<WholeQuestion>) => {
  try {
    if (asked.kind === "open") open(asked);
    else if (asked.kind === "count") count = asked;
    else if (asked.kind === "plateau") plateau = asked;
    else nearness = { asked, work: nearnessOf(asked) };
  } catch (error) {
    fail("key" in asked ? asked.key : "", error);
  }
  if (!running) later();
});

function later(): void {
  running = true;
  setTimeout(() => {
    running = false;
    if (turn()) later();
  }, 0);
}

/** A little work; true where there is more. */
function turn(): boolean {
  if (count !== null) {
    const asked = count;
    count = null;
    answer(asked.key, () => {
      const { kept, seconds } = runSift(inputOf(asked.recipe), { now: () => performance.now() });
      return { kind: "count", key: asked.key, kept: kept.length, seconds };
    });
    return true;
  }
  if (plateau !== null) {
    const asked = plateau;
    plateau = null;
    answer(asked.key, () => {
      const started = performance.now();
      const { rmsdTolerances, energyFactors } = asked;
      const counts = countAgainstTolerance({ ...inputOf(asked.recipe), rmsdTolerances, energyFactors });
      return { kind: "plateau", key: asked.key, counts, seconds: (performance.now() - started) / 1000 };
    });
    return true;
  }
  if (nearness !== null) {
    const { asked, work } = nearness;
    const until = performance.now() + SLICE_MS;
    let more = true;
    while (more && performance.now() < until) more = work.next();
    if (!more) {
      nearness = null;
      answer(asked.key, () => ({ kind: "nearness", key: asked.key, ...work.result }));
    } else tell({ kind: "progress", key: asked.key, done: work.done, of: asked.kept.length });
    return true;
  }
  return false;
}

function open(asked: Asked<"open">): void {
  data = unpackAccepted(asked.bytes);
  graph = makeGraph(data.elements, data.bonds, data.isotopes);
  kcalPerUnit = asked.kcalPerUnit;
}

function inputOf(recipe: SiftRecipe) {
  if (data === null || graph === null) throw new Error("The frames are not here yet.");
  const { numbers, positions, energies, elements } = data;
  const usable = recipe.level === null || energies === null || kcalPerUnit === null ? null : energies;
  return {
    graph,
    block: { atoms: elements.length, count: numbers.length, positions },
    numbers,
    energies: usable === null ? null : { ...usable, kcalPerUnit: kcalPerUnit ?? 1 },
    recipe,
  };
}

function nearnessOf({ recipe, kept, most }: Asked<"nearness">): NearnessWork {
  const { block, numbers, graph } = inputOf(recipe);
  const rowOf = new Map(Array.from(numbers, (number, row) => [number, row] as const));
  return new NearnessWork({
    plan: makePlan(graph, recipe.atoms, { symmetry: recipe.symmetry }),
    block,
    rows: Int32Array.from(kept, (frame) => rowOf.get(frame) ?? -1),
    mirror: recipe.mirror === "merge",
    tolerance: recipe.rmsdTolerance,
    most,
    nodeLimit: NODE_LIMIT,
  });
}

function answer(key: string, work: () => WholeAnswer): void {
  try {
    tell(work());
  } catch (error) {
    fail(key, error);
  }
}

function fail(key: string, error: unknown): void {
  tell({ kind: "failed", key, message: error instanceof Error ? error.message : "This did not work." });
}

function tell(answer: WholeAnswer): void {
  self.postMessage(answer);
}
