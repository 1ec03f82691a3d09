import { useCallback, useEffect, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import type { SaidView } from "~/lib/averages/averages-view";
import {
  MEASURED_PROPERTIES_PARAM,
  type PropertyMeasurements,
  readMeasuredProperties,
  writeMeasuredProperties,
} from "~/lib/averages/measured-properties";
import { searchOf } from "~/lib/url-state";

/** Measured values of properties: kept with the ensemble; until then a draft that the address holds. */
export function useMeasuredProperties(said: SaidView) {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const kept = useMemo((): PropertyMeasurements => new Map(said.properties?.values ?? []), [said.properties]);
  const written = useMemo(() => {
    const text = new URLSearchParams(search).get(MEASURED_PROPERTIES_PARAM);
    return text === null ? null : readMeasuredProperties(text);
  }, [search]);
  const set = useCallback(
    (values: PropertyMeasurements) => {
      const now = new URLSearchParams(search);
      const next = new URLSearchParams(search);
      const text = writeMeasuredProperties(values);
      if (text === writeMeasuredProperties(kept)) next.delete(MEASURED_PROPERTIES_PARAM);
      else next.set(MEASURED_PROPERTIES_PARAM, text);
      if (searchOf(next) === searchOf(now)) return;
      void navigate(
        { pathname, search: searchOf(next) },
        { replace: true, preventScrollReset: true, defaultShouldRevalidate: false },
      );
    },
    [search, pathname, navigate, kept],
  );
  const settled = written !== null && writeMeasuredProperties(written) === writeMeasuredProperties(kept);
  // What was a draft and is kept by now needs no place in the address.
  useEffect(() => {
    if (settled) set(kept);
  }, [settled, set, kept]);
  return {
    values: written ?? kept,
    anyKept: kept.size > 0,
    /** True while the address says something else than what is kept with the ensemble. */
    draft: written !== null && !settled,
    set,
    /** Back to what is kept. */
    drop: useCallback(() => set(kept), [set, kept]),
  };
}
