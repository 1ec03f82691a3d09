import { useCallback, useLayoutEffect, useMemo, useRef } from "react";
import { useLocation, useNavigate } from "react-router";
import { changeState, readState, searchOf, type WorkbenchState, writeState } from "~/lib/url-state";

export interface ChangeHow {
  /** The change takes the place of the step before it in the browser's history. */
  replace?: boolean;
  /** One of many small steps, as of a held arrow key: those that follow each other closely are one step back. */
  gradual?: boolean;
}

/** Settles once the address has changed. */
export type ChangeState = (change: Partial<WorkbenchState>, how?: ChangeHow) => Promise<void>;

/** Gradual changes of the same thing within this time belong to one gesture. */
const GESTURE_MS = 1000;

/**
 * What is selected, read from the address and written to it. A change is a step of the browser's history unless
 * `replace`; it fetches nothing, but for another sift, which the workbench's loader reads.
 */
export function useAddressState(): [WorkbenchState, ChangeState] {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const state = useMemo(() => readState(new URLSearchParams(search)), [search]);
  // Two changes may come before the page has followed the first: the second builds on it.
  const latest = useRef(search);
  const underWay = useRef(0);
  const gesture = useRef<{ of: string; at: number } | null>(null);
  useLayoutEffect(() => {
    if (underWay.current > 0 || latest.current === search) return;
    // The reader went back or on: what was being moved is over.
    latest.current = search;
    gesture.current = null;
  }, [search]);
  const change = useCallback<ChangeState>(
    async (part, how) => {
      const now = new URLSearchParams(latest.current);
      const next = searchOf(writeState(changeState(readState(now), part), now));
      if (next === searchOf(now)) return;
      latest.current = next;
      const of = Object.keys(part).join();
      const last = gesture.current;
      const goesOn = how?.gradual === true && last?.of === of && performance.now() - last.at < GESTURE_MS;
      gesture.current = how?.gradual ? { of, at: performance.now() } : null;
      underWay.current += 1;
      try {
        await navigate(
          { pathname, search: next },
          {
            replace: (how?.replace ?? false) || goesOn,
            preventScrollReset: true,
            // Only a change of the sift concerns the server.
            defaultShouldRevalidate: "sift" in part,
          },
        );
      } finally {
        underWay.current -= 1;
      }
    },
    [pathname, navigate],
  );
  return [state, change];
}
