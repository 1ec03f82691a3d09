import { type AcceptedData, unpackAccepted } from "~/lib/accepted-data";
import { NearnessWork } from "~/lib/align/nearness";
import { makePlan } from "~/lib/align/plan";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import { beginCounts } from "~/lib/sift/count-against-tolerance";
import { ToleranceCounter } from "~/lib/sift/tolerance-counter";
import { type Graph, makeGraph } from "~/lib/structure";
import type { WholeAnswer, WholeQuestion } from "./whole-ensemble-protocol";

/**
 * Questions about all accepted frames, off the page's thread, with the functions that the server runs. All work goes in
 * slices, so that newer questions are heard. What is being counted is counted to its end, or a thumb that moves on would
 * never see a number; of the questions that came meanwhile the newest is next.
 */
const SLICE_MS = 40;
/** Work of this length that is not half done gives way to a newer question. */
const PATIENCE_MS = 1000;
/** Nodes that one comparison may cost: a list must not hang on a single pair. */
const NODE_LIMIT = 20_000;

type Asked<Kind extends WholeQuestion["kind"]> = Extract<WholeQuestion, { kind: Kind }>;

interface Lane<Kind extends "count" | "plateau"> {
  next: Asked<Kind> | null;
  work: Work | null;
}

interface Work {
  key: string;
  run: { next(): boolean; readonly done: number };
  answer(seconds: number): WholeAnswer;
  /** Of this thread, without its pauses. */
  spentMs: number;
}

let data: AcceptedData | null = null;
let graph: Graph | null = null;
let kcalPerUnit: number | null = null;
/** Counts and curves: the one under way and the newest question of its kind. */
const lanes = {
  count: { next: null, work: null } as Lane<"count">,
  plateau: { next: null, work: null } as Lane<"plateau">,
};
let counter: { key: string; counter: ToleranceCounter } | null = null;
let nearness: { asked: Asked<"nearness">; work: NearnessWork } | null = null;
let running = false;

self.addEventListener("message", ({ data: asked }: MessageEvent<WholeQuestion>) => {
  try {
    if (asked.kind === "open") open(asked);
    else if (asked.kind === "count") lanes.count.next = asked;
    else if (asked.kind === "plateau") lanes.plateau.next = asked;
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
  if (advance(lanes.count, beginCount) || advance(lanes.plateau, beginPlateau)) return true;
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

/** A slice of what is counted in a lane; false where there is nothing to count. */
function advance<Kind extends "count" | "plateau">(lane: Lane<Kind>, begin: (asked: Asked<Kind>) => Work) {
  const { next } = lane;
  if (lane.work !== null && next !== null) {
    const { spentMs, run } = lane.work;
    if (spentMs > PATIENCE_MS && run.done < 0.5) lane.work = null;
  }
  if (lane.work === null && next === null) return false;
  const key = lane.work?.key ?? (next as { key: string } | null)?.key ?? "";
  try {
    const from = performance.now();
    if (lane.work === null && next !== null) {
      lane.next = null;
      lane.work = begin(next);
    }
    const { work } = lane;
    if (work === null) return false;
    let more = true;
    while (more && performance.now() < from + SLICE_MS) more = work.run.next();
    work.spentMs += performance.now() - from;
    if (!more) {
      lane.work = null;
      tell(work.answer(work.spentMs / 1000));
    }
  } catch (error) {
    lane.work = null;
    fail(key, error);
  }
  return true;
}

function beginCount({ key, recipe }: Asked<"count">): Work {
  const { atoms, symmetry, mirror } = recipe;
  const input = { ...inputOf(recipe), atoms, symmetry, mirror };
  // What is remembered of pairs does not hang on the tolerances.
  const of = JSON.stringify([atoms, symmetry, mirror, input.energies === null]);
  if (counter?.key !== of) counter = { key: of, counter: new ToleranceCounter(input) };
  const run = counter.counter.begin(recipe);
  return {
    key,
    run,
    spentMs: 0,
    answer: (seconds) => ({ kind: "count", key, recipe, kept: run.kept, seconds }),
  };
}

function beginPlateau({ key, recipe, rmsdTolerances, energyFactors }: Asked<"plateau">): Work {
  const run = beginCounts({ ...inputOf(recipe), rmsdTolerances, energyFactors });
  return {
    key,
    run,
    spentMs: 0,
    answer: (seconds) => ({ kind: "plateau", key, counts: run.result, seconds }),
  };
}

function open(asked: Asked<"open">): void {
  data = unpackAccepted(asked.bytes);
  graph = makeGraph(data.elements, data.bonds, data.isotopes);
  kcalPerUnit = asked.kcalPerUnit;
  counter = null;
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
