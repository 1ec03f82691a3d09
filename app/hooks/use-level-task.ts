import { useEffect, useState } from "react";
import type { LevelTaskName, LevelTasks } from "./levels-protocol";

/** Settings that are still moving start no work. */
const SETTLE_MS = 200;

/**
 * The result of a task on a thread of its own; null while it is awaited and where there is nothing to do. A newer
 * input ends the work on the older one.
 *
 * @param input must be the same object as long as nothing changes
 */
export function useLevelTask<Name extends LevelTaskName>(
  name: Name,
  input: LevelTasks[Name]["input"] | null,
): LevelTasks[Name]["result"] | null {
  const [done, setDone] = useState<{ input: unknown; result: LevelTasks[Name]["result"] } | null>(null);
  useEffect(() => {
    if (input === null) return;
    let worker: Worker | null = null;
    const timer = setTimeout(() => {
      worker = new Worker(new URL("./levels.worker.ts", import.meta.url), { type: "module" });
      worker.addEventListener("message", ({ data }: MessageEvent<LevelTasks[Name]["result"]>) => {
        setDone({ input, result: data });
        worker?.terminate();
      });
      worker.postMessage({ name, input });
    }, SETTLE_MS);
    return () => {
      clearTimeout(timer);
      worker?.terminate();
    };
  }, [name, input]);
  return done !== null && done.input === input ? done.result : null;
}
