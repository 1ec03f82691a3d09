import { useCallback, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import { pairLabel, shapeLabel } from "~/lib/averages/torsion-label";
import { torsion } from "~/lib/measure/geometry";
import { searchOf } from "~/lib/url-state";
import { useWorkbench } from "./workbench-context";

/** Longest label that the address holds. */
const MAX_LABEL = 80;

export interface ShapeColumn {
  /** Torsions behind the label: "torsion C3–C4–N5–S6, ...". */
  words: string;
  /** By position in the set; null while the structure is on its way. */
  labels: readonly (string | null)[];
  /** Labels there are, the most populated first. */
  kinds: { label: string; count: number; population: number }[];
  /** The label that the table is narrowed to; null shows all. */
  only: string | null;
  narrow: (label: string | null) => void;
}

/**
 * Labels of conformers by the torsions that were made columns (t, g+, g−, c, a+, a−), and the one that the table is
 * narrowed to. A conformer that stands for a mirror pair is named by the hand whose first sign is plus.
 */
export function useShape(): ShapeColumn | null {
  const { ensemble, result, rows, coordinates } = useWorkbench();
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const only = new URLSearchParams(search).get("shape")?.slice(0, MAX_LABEL) ?? null;
  const labels = useMemo(
    () =>
      (result?.kept ?? []).map(({ frame, degeneracy }) => {
        const at = coordinates.positions.get(frame);
        if (!at) return null;
        const label = shapeLabel(
          ensemble.torsions.map(({ atoms: [i = 0, j = 0, k = 0, l = 0] }) => torsion(at, i, j, k, l)),
        );
        return degeneracy === 2 ? pairLabel(label) : label;
      }),
    [result, coordinates.positions, ensemble.torsions],
  );
  const kinds = useMemo(() => {
    const found = new Map<string, { label: string; count: number; population: number }>();
    for (const row of rows) {
      const label = labels[row.index];
      if (label === null || label === undefined) continue;
      const kind = found.get(label) ?? { label, count: 0, population: 0 };
      found.set(label, kind);
      kind.count += 1;
      kind.population += row.population ?? 0;
    }
    return [...found.values()].sort((a, b) => b.population - a.population || b.count - a.count);
  }, [rows, labels]);
  const narrow = useCallback(
    (label: string | null) => {
      const params = new URLSearchParams(search);
      if (label === null) params.delete("shape");
      else params.set("shape", label);
      void navigate(
        { pathname, search: searchOf(params) },
        { replace: true, preventScrollReset: true, defaultShouldRevalidate: false },
      );
    },
    [search, pathname, navigate],
  );
  if (ensemble.torsions.length === 0) return null;
  return {
    words: ensemble.torsions.map(({ name }) => name).join(", "),
    labels,
    kinds,
    // What no conformer has would hide the whole table.
    only: kinds.some(({ label }) => label === only) ? only : null,
    narrow,
  };
}
