import type { SortState } from "../url-state.ts";
import type { ConformerRow } from "./conformers.ts";

/** Columns that order the table. `rmsd` and `measure` are looked up by position in the distinct set. */
export const SORT_COLUMNS = [
  "conformer",
  "frame",
  "energy",
  "population",
  "degeneracy",
  "symmetry",
  "found",
  "batches",
  "mirror",
  "rmsd",
  "measure",
] as const;
export type SortColumn = (typeof SORT_COLUMNS)[number];

/** Values that are computed in the browser, by position in the set; a hole is "not known yet". */
export interface ComputedColumns {
  rmsd: ArrayLike<number | null | undefined> | null;
  measure: ArrayLike<number | null | undefined> | null;
}

/**
 * Rows in the order of a column. Equal values keep the order of the set; what is absent or not yet known comes last,
 * whichever way the column runs.
 *
 * @example sortRows(rows, { column: "population", descending: true }, none)[0].name // the most populated
 */
export function sortRows(
  rows: readonly ConformerRow[],
  sort: SortState | null,
  computed: ComputedColumns,
): ConformerRow[] {
  const column = SORT_COLUMNS.find((name) => name === sort?.column);
  if (sort === null || column === undefined) return [...rows];
  const sign = sort.descending ? -1 : 1;
  const value = (row: ConformerRow) => known(cellOf(row, column, computed));
  return [...rows].sort((a, b) => {
    const x = value(a);
    const y = value(b);
    if (x === null || y === null) return x === y ? a.index - b.index : x === null ? 1 : -1;
    return sign * (x - y) || a.index - b.index;
  });
}

/** What one batch alone found first, batch by batch; then what two found, and so on. */
function batchesRank(batches: ConformerRow["batches"]): number | null {
  return batches ? batches.length + (batches[0] ?? 0) * 1e-6 : null;
}

function known(value: number | null | undefined): number | null {
  return value === null || value === undefined || Number.isNaN(value) ? null : value;
}

function cellOf(row: ConformerRow, column: SortColumn, computed: ComputedColumns): number | null | undefined {
  switch (column) {
    case "conformer":
      return row.index;
    case "frame":
      return row.frame;
    case "energy":
      return row.relativeEnergy;
    case "population":
      return row.population;
    case "degeneracy":
      return row.degeneracy;
    case "symmetry":
      return row.symmetryNumber;
    case "found":
      return row.found;
    case "batches":
      return batchesRank(row.batches);
    case "mirror":
      return row.mirrorRmsd;
    case "rmsd":
      return computed.rmsd?.[row.index];
    case "measure":
      return computed.measure?.[row.index];
  }
}
