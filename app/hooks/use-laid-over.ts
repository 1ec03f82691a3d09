import { useSyncExternalStore } from "react";

/** Two frames that were asked for as a pair: as long as they are what is selected, the view shows them and nothing else. */
let pair: readonly number[] | null = null;
const listeners = new Set<() => void>();

export function setLaidOver(frames: readonly number[]): void {
  pair = frames;
  for (const tell of listeners) tell();
}

export function useLaidOver(): readonly number[] | null {
  return useSyncExternalStore(
    (tell) => {
      listeners.add(tell);
      return () => listeners.delete(tell);
    },
    () => pair,
    () => null,
  );
}
