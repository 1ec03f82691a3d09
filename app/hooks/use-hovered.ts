import { useSyncExternalStore } from "react";

/** The frame under the pointer in a table. Apart from the workbench's state, so that moving the mouse redraws the view alone. */
let hovered: number | null = null;
const listeners = new Set<() => void>();

export function setHovered(frame: number | null): void {
  if (hovered === frame) return;
  hovered = frame;
  for (const tell of listeners) tell();
}

export function useHovered(): number | null {
  return useSyncExternalStore(
    (tell) => {
      listeners.add(tell);
      return () => listeners.delete(tell);
    },
    () => hovered,
    () => null,
  );
}
