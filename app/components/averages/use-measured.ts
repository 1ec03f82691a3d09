import { useCallback, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import { type MeasuredState, measuredIn, withMeasured } from "~/lib/averages/measured";
import { searchOf } from "~/lib/url-state";

/** Measured values of a per-atom quantity, which the address holds: whoever opens it sees the same comparison. */
export function useMeasured(quantity: string): [MeasuredState, (change: Partial<MeasuredState>) => void] {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const state = useMemo(() => measuredIn(new URLSearchParams(search), quantity), [search, quantity]);
  const change = useCallback(
    (part: Partial<MeasuredState>) => {
      const now = new URLSearchParams(search);
      const next = searchOf(withMeasured(now, { ...measuredIn(now, quantity), ...part }));
      if (next === searchOf(now)) return;
      void navigate(
        { pathname, search: next },
        { replace: true, preventScrollReset: true, defaultShouldRevalidate: false },
      );
    },
    [search, pathname, navigate, quantity],
  );
  return [state, change];
}
