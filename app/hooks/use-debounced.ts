import { useEffect, useRef, useState } from "react";

/** Calls `act` once `wait` milliseconds have passed without another call; what waits is dropped on leaving. */
export function useDebounced<Args extends unknown[]>(act: (...args: Args) => void, wait: number) {
  const latest = useRef(act);
  latest.current = act;
  const timer = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  const [later] = useState(() => {
    const call = (...args: Args) => {
      clearTimeout(timer.current);
      timer.current = setTimeout(() => latest.current(...args), wait);
    };
    call.cancel = () => clearTimeout(timer.current);
    return call;
  });
  useEffect(() => later.cancel, [later]);
  return later;
}
