import { useCallback, useEffect, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import type { SaidView } from "~/lib/averages/averages-view";
import {
  type MeasuredState,
  measuredIn,
  measuredState,
  nothingMeasured,
  settle,
  withMeasured,
  writeMeasured,
} from "~/lib/averages/measured";
import { searchOf } from "~/lib/url-state";

export interface Measured {
  /** The draft, else what is kept. */
  state: MeasuredState;
  kept: MeasuredState;
  /** True while the address says something else than what is kept with the ensemble. */
  draft: boolean;
  change: (part: Partial<MeasuredState>) => void;
  /** Back to what is kept. */
  drop: () => void;
}

/** Measured values of a per-atom quantity: kept with the ensemble; until then a draft that the address holds. */
export function useMeasured(
  quantity: string,
  said: SaidView,
  /** Atoms (from 1) of each signal as it is now; one object while they are the same. */
  groups: readonly (readonly number[])[],
): Measured {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const kept = useMemo(() => {
    const record = said.measured.find((one) => one.quantity === quantity);
    return settle(record ? measuredState(record) : nothingMeasured(quantity), groups);
  }, [said, quantity, groups]);
  const draft = useMemo(() => {
    const written = measuredIn(new URLSearchParams(search), quantity);
    return written === null ? null : settle(written, groups);
  }, [search, quantity, groups]);
  const set = useCallback(
    (state: MeasuredState) => {
      const now = new URLSearchParams(search);
      const next = searchOf(withMeasured(now, settle(state, groups), kept));
      if (next === searchOf(now)) return;
      void navigate(
        { pathname, search: next },
        { replace: true, preventScrollReset: true, defaultShouldRevalidate: false },
      );
    },
    [search, pathname, navigate, kept, groups],
  );
  const settled = draft !== null && writeMeasured(draft) === writeMeasured(kept);
  // What was a draft and is kept by now needs no place in the address.
  useEffect(() => {
    if (settled) set(kept);
  }, [settled, set, kept]);
  const state = draft ?? kept;
  return {
    state,
    kept,
    draft: draft !== null && !settled,
    change: useCallback((part) => set({ ...state, ...part }), [set, state]),
    drop: useCallback(() => set(kept), [set, kept]),
  };
}
