import { useCallback, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import { type AveragesState, readAveragesState, writeAveragesState } from "~/lib/averages/averages-state";
import { searchOf } from "~/lib/url-state";

/** Temperatures, error and property that the address holds beside the state of the workbench. */
export function useAveragesState(): [AveragesState, (change: Partial<AveragesState>) => void] {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const state = useMemo(() => readAveragesState(new URLSearchParams(search)), [search]);
  const change = useCallback(
    (part: Partial<AveragesState>) => {
      const now = new URLSearchParams(search);
      const next = searchOf(writeAveragesState({ ...readAveragesState(now), ...part }, now));
      if (next === searchOf(now)) return;
      void navigate(
        { pathname, search: next },
        { replace: true, preventScrollReset: true, defaultShouldRevalidate: false },
      );
    },
    [search, pathname, navigate],
  );
  return [state, change];
}
