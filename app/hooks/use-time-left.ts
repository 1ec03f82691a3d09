import { useRef } from "react";

/** Before so much is done, or time has passed, a guess would jump about. */
const LEAST_SHARE = 0.03;
const LEAST_MS = 700;

/**
 * Seconds that a computation still takes, from how far it came since it was first seen; null while nothing can be said.
 *
 * @param key another computation begins anew
 */
export function useTimeLeft(key: string | null, share: number): number | null {
  const start = useRef<{ key: string; at: number; share: number } | null>(null);
  if (key === null) {
    start.current = null;
    return null;
  }
  const now = typeof performance === "undefined" ? 0 : performance.now();
  if (start.current === null || start.current.key !== key || share < start.current.share) {
    start.current = { key, at: now, share };
    return null;
  }
  const done = share - start.current.share;
  const passed = now - start.current.at;
  if (done < LEAST_SHARE || passed < LEAST_MS || share >= 1) return null;
  return ((1 - share) * passed) / done / 1000;
}
