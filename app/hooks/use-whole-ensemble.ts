import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import { ENERGY_UNITS, kcalPer } from "~/lib/units";
import type { EnsembleView } from "~/lib/views";
import { failureWords } from "./failure-words";
import type {
  CountAnswer,
  NearnessAnswer,
  PlateauAnswer,
  WholeAnswer,
  WholeQuestion,
} from "./whole-ensemble-protocol";

/** Coordinates of as many bytes are fetched unasked; more than that only when the reader wants it. */
const UNASKED_BYTES = 24 * 2 ** 20;
export const PLATEAU_TOLERANCES = [0.02, 0.05, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.85, 1];
export const PLATEAU_FACTORS = [0.5, 1, 2];
const NEAREST_PAIRS = 5;

type Job = "live" | "long";

export interface WholeEnsemble {
  state: "waiting" | "loading" | "ready" | "failed";
  /** Bytes of the coordinates. */
  bytes: number;
  error: string | null;
  /** Fetches what is too large to be fetched unasked. */
  load(): void;
  /** Newest answer; its key says to which recipe: while a thumb moves, that may be one before the newest. */
  count: CountAnswer | null;
  plateau: PlateauAnswer | null;
  nearness: NearnessAnswer | null;
  /** Conformers compared so far, while their neighbours are searched. */
  progress: { done: number; of: number } | null;
}

/** The recipe as a key of what a thread answers. */
export function recipeKey(recipe: SiftRecipe): string {
  return JSON.stringify(recipe);
}

/** The same for what the tolerance itself does not change. */
export function plateauKey(recipe: SiftRecipe): string {
  return JSON.stringify({ ...recipe, rmsdTolerance: 0 });
}

/**
 * All accepted frames in threads of the browser: what a sift would keep while a slider moves, the count against the
 * tolerance, and how near the kept conformers lie. One thread answers the slider, another what takes longer.
 *
 * @param shown recipe and kept frames of the sift shown; null computes nothing
 * @param live the recipe as the settings stand, which may be ahead of what is shown
 */
export function useWholeEnsemble(
  ensemble: EnsembleView,
  shown: { id: string; recipe: SiftRecipe; kept: readonly number[]; current: boolean } | null,
  live: SiftRecipe | null,
): WholeEnsemble {
  const bytes = 24 * ensemble.atoms * ensemble.accepted;
  const [wanted, setWanted] = useState(false);
  const [held, setHeld] = useState<{ source: string; bytes: ArrayBuffer } | null>(null);
  const [error, setError] = useState<string | null>(null);
  const [count, setCount] = useState<CountAnswer | null>(null);
  const [plateau, setPlateau] = useState<PlateauAnswer | null>(null);
  const [nearness, setNearness] = useState<NearnessAnswer | null>(null);
  const [progress, setProgress] = useState<{ done: number; of: number } | null>(null);
  const level = live?.level ?? shown?.recipe.level ?? null;
  const begin = shown !== null && (wanted || bytes <= UNASKED_BYTES);
  // Frames that were held or released since are other frames: the address names them by the last change.
  const source = `/files/ensembles/${ensemble.id}/accepted?at=${encodeURIComponent(ensemble.changedAt)}${level === null ? "" : `&level=${level}`}`;

  useEffect(() => {
    if (!begin) return;
    const control = new AbortController();
    setError(null);
    // A count of other frames is no count of these.
    setCount(null);
    fetchFrames(source, control.signal)
      .then((bytes) => setHeld({ source, bytes }))
      .catch((caught) => {
        if (!control.signal.aborted) setError(failureWords(caught));
      });
    return () => control.abort();
  }, [begin, source]);

  const ready = held !== null && held.source === source;
  const unit = ensemble.levels.find((one) => one.id === level)?.unit ?? null;
  const threads = useThreads(ready ? held.bytes : null, unit, (answer) => {
    if (answer.kind === "count") setCount(answer);
    else if (answer.kind === "plateau") setPlateau(answer);
    else if (answer.kind === "nearness") {
      setNearness(answer);
      setProgress(null);
    } else if (answer.kind === "progress") setProgress({ done: answer.done, of: answer.of });
    else setError(answer.message);
  });

  const liveKey = live === null ? null : recipeKey(live);
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key names the recipe
  useEffect(() => {
    // Also where that is the sift shown: the first move of a thumb then meets a thread that has its code and pairs ready.
    if (ready && live !== null && liveKey !== null)
      threads.ask("live", { kind: "count", key: liveKey, recipe: live });
  }, [ready, liveKey, threads]);

  const longKey = live === null ? null : plateauKey(live);
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key names the recipe
  useEffect(() => {
    if (!ready || live === null || longKey === null) return;
    const { level } = live;
    threads.ask("long", {
      kind: "plateau",
      key: longKey,
      recipe: live,
      rmsdTolerances: PLATEAU_TOLERANCES,
      energyFactors: level === null || live.energyTolerance === null ? [1] : PLATEAU_FACTORS,
    });
  }, [ready, longKey, threads]);

  // On the same thread as the plateau, which goes first: it is what a moving slider waits for.
  // biome-ignore lint/correctness/useExhaustiveDependencies: a sift never changes
  useEffect(() => {
    if (!ready || shown === null || !shown.current) return;
    const { id, recipe, kept } = shown;
    threads.ask("long", { kind: "nearness", key: id, recipe, kept: [...kept], most: NEAREST_PAIRS });
  }, [ready, shown?.id, threads]);

  return {
    state: error !== null ? "failed" : ready ? "ready" : begin ? "loading" : "waiting",
    bytes,
    error,
    load: () => {
      setError(null);
      setWanted(true);
    },
    count,
    plateau,
    nearness,
    progress,
  };
}

async function fetchFrames(address: string, signal: AbortSignal): Promise<ArrayBuffer> {
  const response = await fetch(address, { signal, headers: { accept: "application/octet-stream" } });
  if (!response.ok) throw new Error(`The accepted frames could not be fetched (${response.status}).`);
  return response.arrayBuffer();
}

/** Two threads over the same frames. They finish what they are about to answer and then take the newest question. */
function useThreads(bytes: ArrayBuffer | null, unit: string | null, hear: (answer: WholeAnswer) => void) {
  const listener = useRef(hear);
  listener.current = hear;
  const pool = useRef<Map<Job, Thread>>(new Map());
  // biome-ignore lint/correctness/useExhaustiveDependencies: other frames or another unit are other threads
  useEffect(() => {
    const open = pool.current;
    return () => {
      for (const thread of open.values()) thread.end();
      open.clear();
    };
  }, [bytes, unit]);
  const ask = useCallback(
    (job: Job, question: Exclude<WholeQuestion, { kind: "open" }>) => {
      if (bytes === null) return;
      let thread = pool.current.get(job);
      if (!thread) {
        const energyUnit = ENERGY_UNITS.find((one) => one === unit);
        thread = new Thread(bytes, energyUnit ? kcalPer(energyUnit) : null, (answer) =>
          listener.current(answer),
        );
        pool.current.set(job, thread);
      }
      thread.ask(question);
    },
    [bytes, unit],
  );
  return useMemo(() => ({ ask }), [ask]);
}

class Thread {
  private readonly worker: Worker;

  constructor(bytes: ArrayBuffer, kcalPerUnit: number | null, hear: (answer: WholeAnswer) => void) {
    this.worker = new Worker(new URL("./whole-ensemble.worker.ts", import.meta.url), { type: "module" });
    this.worker.addEventListener("message", ({ data }: MessageEvent<WholeAnswer>) => hear(data));
    this.worker.postMessage({ kind: "open", bytes, kcalPerUnit } satisfies WholeQuestion);
  }

  ask(question: Exclude<WholeQuestion, { kind: "open" }>): void {
    this.worker.postMessage(question);
  }

  end(): void {
    this.worker.terminate();
  }
}
