import { useMemo } from "react";
import useSWR from "swr";

/** Doubles asked for at once: 4 MB, a fraction of a second on a slow line. */
const DOUBLES_A_REQUEST = 500_000;
/** Longer lists would make addresses that servers refuse. */
const FRAMES_A_REQUEST = 400;

/** Coordinates never change once they are read, so they are kept as long as the page lives. */
const cache = new Map<string, Map<number, Float64Array>>();

function cacheOf(ensembleId: string): Map<number, Float64Array> {
  let found = cache.get(ensembleId);
  if (!found) {
    found = new Map();
    cache.set(ensembleId, found);
  }
  return found;
}

export interface Coordinates {
  /** Packed x, y, z in Å by frame number; frames that are on their way are absent. */
  positions: ReadonlyMap<number, Float64Array>;
  /** Frames asked for and not yet here. */
  missing: number;
  error: Error | null;
  retry: () => void;
}

/**
 * Coordinates of the frames shown, fetched once and in batches as bytes.
 *
 * @param frames in order of importance: the first ones come first
 */
export function useCoordinates(ensembleId: string, atoms: number, frames: readonly number[]): Coordinates {
  const have = cacheOf(ensembleId);
  const missing = frames.filter((frame) => !have.has(frame));
  const batch = missing.slice(
    0,
    Math.max(1, Math.min(FRAMES_A_REQUEST, Math.floor(DOUBLES_A_REQUEST / (3 * atoms)))),
  );
  const { data, error, mutate } = useSWR<boolean, Error>(
    batch.length === 0
      ? null
      : `/files/ensembles/${ensembleId}/coordinates?frames=${[...batch].sort((a, b) => a - b).join(",")}`,
    async (address: string) => {
      const bytes = await fetchBytes(address);
      const numbers = address.split("=")[1]?.split(",").map(Number) ?? [];
      storeFrames(have, numbers, atoms, bytes);
      return true;
    },
    {
      revalidateOnFocus: false,
      revalidateOnReconnect: false,
      revalidateIfStale: false,
      keepPreviousData: false,
    },
  );
  // The map grows in place; a new one is handed out when it did, so that what depends on it notices.
  const size = have.size;
  // biome-ignore lint/correctness/useExhaustiveDependencies: size and data stand for the contents of the map
  const positions = useMemo(() => new Map(have), [have, size, data]);
  return { positions, missing: missing.length, error: error ?? null, retry: () => void mutate() };
}

async function fetchBytes(address: string): Promise<ArrayBuffer> {
  const response = await fetch(address, { headers: { accept: "application/octet-stream" } });
  if (!response.ok) {
    throw new Error(
      response.status === 404
        ? "These frames are not here any more. Reload the page."
        : `The coordinates could not be fetched (${response.status}).`,
    );
  }
  return response.arrayBuffer();
}

function storeFrames(
  have: Map<number, Float64Array>,
  numbers: readonly number[],
  atoms: number,
  bytes: ArrayBuffer,
): void {
  const length = 3 * atoms;
  const expected = numbers.length * length * Float64Array.BYTES_PER_ELEMENT;
  if (bytes.byteLength !== expected) {
    throw new Error(`The coordinates came incomplete: ${bytes.byteLength} of ${expected} bytes.`);
  }
  // Doubles travel little-endian, as every processor that runs a browser stores them.
  const values = new Float64Array(bytes);
  for (const [k, frame] of numbers.entries()) have.set(frame, values.subarray(k * length, (k + 1) * length));
}
