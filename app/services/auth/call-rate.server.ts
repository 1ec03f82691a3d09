/** Minute windows by caller. In this process only: a rate protects the process, it is no lock. */
const windows = new Map<string, { start: number; count: number }>();
const MINUTE_MS = 60_000;
const SWEEP_AT = 10_000;

/**
 * Counts a call.
 *
 * @returns null when it is within the rate, else the seconds to wait
 */
export function takeCall(name: string, limit: number, now = Date.now()): number | null {
  if (windows.size > SWEEP_AT) sweep(now);
  const found = windows.get(name);
  if (found === undefined || now - found.start >= MINUTE_MS) {
    windows.set(name, { start: now, count: 1 });
    return null;
  }
  found.count += 1;
  return found.count <= limit ? null : Math.max(1, Math.ceil((found.start + MINUTE_MS - now) / 1000));
}

function sweep(now: number): void {
  for (const [name, { start }] of windows) if (now - start >= MINUTE_MS) windows.delete(name);
}
