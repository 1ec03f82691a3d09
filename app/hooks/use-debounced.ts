import { useEffect, useRef } from "react";

/** Calls `act` once `wait` milliseconds have passed without another call; a call under way is dropped on leaving. */
export function useDebounced<Args extends unknown[]>(act: (...args: Args) => void, wait: number) {
  const latest = useRef(act);
  latest.current = act;
  const timer = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  useEffect(() => () => clearTimeout(timer.current), []);
  const later = useRef((...args: Args) => {
    clearTimeout(timer.current);
    timer.current = setTimeout(() => latest.current(...args), wait);
  });
  return later.current;
}
