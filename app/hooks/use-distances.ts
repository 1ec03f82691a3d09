import { useEffect, useRef, useState } from "react";
import type { DistanceSettings } from "~/lib/workbench/distances";
import type { DistanceAnswer, DistanceRequest } from "./distances-protocol";

export interface DistanceColumn {
  /** Position of the conformer that distances are taken to. */
  reference: number;
  /** Å by position in the set; only the first `known` are there yet. */
  rmsd: Float64Array;
  /** 0 where only a bound from above is known. */
  exact: Uint8Array;
  known: number;
}

/**
 * RMSD of every conformer to one of them, worked out on a thread of its own.
 *
 * @param set changes with the sift: its molecule, how it compares, and the frames in the order of the distinct set
 * @param positions coordinates by frame; work begins when those of all frames are here
 * @param reference position in the set, or null for no column
 */
export function useDistances(
  set: {
    key: string;
    elements: number[];
    bonds: number[];
    options: DistanceSettings;
    frames: readonly number[];
  } | null,
  positions: ReadonlyMap<number, Float64Array>,
  reference: number | null,
): DistanceColumn | null {
  const worker = useRef<Worker | null>(null);
  const id = useRef(0);
  const [column, setColumn] = useState<DistanceColumn | null>(null);
  const [begun, setBegun] = useState<string | null>(null);
  const ready = set !== null && set.frames.length > 0 && set.frames.every((frame) => positions.has(frame));

  useEffect(() => {
    const made = new Worker(new URL("./distances.worker.ts", import.meta.url), { type: "module" });
    made.addEventListener("message", ({ data }: MessageEvent<DistanceAnswer>) => {
      if (data.id !== id.current) return;
      setColumn({ reference: data.reference, rmsd: data.rmsd, exact: data.exact, known: data.known });
    });
    worker.current = made;
    return () => {
      made.terminate();
      worker.current = null;
    };
  }, []);

  // biome-ignore lint/correctness/useExhaustiveDependencies: `set.key` names its contents
  useEffect(() => {
    setColumn(null);
    setBegun(null);
    if (!ready || set === null || worker.current === null) return;
    id.current += 1;
    const send = (request: DistanceRequest) => worker.current?.postMessage(request);
    const { elements, bonds, options, frames } = set;
    send({ kind: "begin", id: id.current, elements, bonds, options });
    const length = 3 * elements.length;
    const packed = new Float64Array(frames.length * length);
    for (const [k, frame] of frames.entries()) {
      const one = positions.get(frame);
      if (one) packed.set(one, k * length);
    }
    send({ kind: "add", id: id.current, atoms: elements.length, positions: packed });
    setBegun(set.key);
  }, [set?.key, ready]);

  useEffect(() => {
    if (begun === null || reference === null) return;
    worker.current?.postMessage({ kind: "column", id: id.current, reference } satisfies DistanceRequest);
  }, [begun, reference]);

  return begun === set?.key ? column : null;
}
