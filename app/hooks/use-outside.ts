import { useEffect, useState } from "react";
import type { AtomSet } from "~/lib/structure";
import type { OutsideAnswer, OutsideQuestion } from "./outside-protocol";

/**
 * RMSDs of conformers to a structure from outside, worked out on a thread of their own.
 *
 * @param key names everything that the answer hangs on; null asks nothing
 * @param frames of the conformers, in the order of the answer; asked when the coordinates of all are here
 */
export function useOutside(
  key: string | null,
  frames: readonly number[],
  positions: ReadonlyMap<number, Float64Array>,
  question: {
    elements: number[];
    bonds: number[];
    outside: OutsideQuestion["outside"];
    atoms: AtomSet;
  } | null,
): OutsideAnswer | null {
  const [answer, setAnswer] = useState<{ key: string; found: OutsideAnswer } | null>(null);
  const ready = key !== null && question !== null && frames.every((frame) => positions.has(frame));
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key names the rest
  useEffect(() => {
    if (!ready || key === null || question === null) return;
    const worker = new Worker(new URL("./outside.worker.ts", import.meta.url), { type: "module" });
    worker.addEventListener("message", ({ data }: MessageEvent<OutsideAnswer>) => {
      setAnswer({ key, found: data });
      worker.terminate();
    });
    const length = 3 * question.elements.length;
    const packed = new Float64Array(frames.length * length);
    for (const [k, frame] of frames.entries()) {
      const one = positions.get(frame);
      if (one) packed.set(one, k * length);
    }
    worker.postMessage({ ...question, positions: packed } satisfies OutsideQuestion);
    return () => worker.terminate();
  }, [key, ready]);
  return answer !== null && answer.key === key ? answer.found : null;
}
