import { useCallback, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import { readState, searchOf, type WorkbenchState, writeState } from "~/lib/url-state";

/** Settles once the address has changed. */
export type ChangeState = (change: Partial<WorkbenchState>, how?: { replace?: boolean }) => Promise<void>;

/**
 * What is selected, read from the address and written to it. A change is a step of the browser's history unless
 * `replace`; it fetches nothing, but for another sift, which the workbench's loader reads.
 */
export function useAddressState(): [WorkbenchState, ChangeState] {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const state = useMemo(() => readState(new URLSearchParams(search)), [search]);
  const change = useCallback<ChangeState>(
    async (part, how) => {
      const now = new URLSearchParams(search);
      const next = searchOf(writeState({ ...readState(now), ...part }, now));
      if (next === searchOf(now)) return;
      await navigate(
        { pathname, search: next },
        {
          replace: how?.replace ?? false,
          preventScrollReset: true,
          // Only a change of the sift concerns the server.
          defaultShouldRevalidate: "sift" in part,
        },
      );
    },
    [search, pathname, navigate],
  );
  return [state, change];
}
