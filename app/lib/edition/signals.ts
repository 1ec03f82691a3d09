import { countsUp } from "../averages/counter.ts";
import type { EditionContent } from "./content.ts";
import { atomNames } from "./measured.ts";

type AverageRow = NonNullable<EditionContent["averages"]>[number];

/**
 * The averages as a page lists them: atoms of one quantity that share all their figures, as equivalent ones do, in one
 * row under their names. The files hold one row a column.
 *
 * @returns with the place of each (of its first column) in `content.averages`; null where nothing is averaged
 * @example signalRows(content)?.[0]?.row.property // "shift of H4, H5"
 */
export function signalRows(
  content: Pick<EditionContent, "averages" | "columns" | "kept" | "ensemble">,
): { row: AverageRow; place: number }[] | null {
  if (content.averages === null) return null;
  const columns = new Map(content.columns.map((column) => [column.name, column]));
  const entries: { row: AverageRow; place: number; quantity: string | null; atoms: number[] }[] = [];
  const known = new Map<string, number[]>();
  for (const [place, row] of content.averages.entries()) {
    const { quantity = null, atom = null } = columns.get(row.property) ?? {};
    const { property: _property, ...figures } = row;
    const key = JSON.stringify([quantity, figures]);
    const before = quantity === null || atom === null ? undefined : known.get(key);
    if (before) {
      before.push(atom ?? 0);
      continue;
    }
    const atoms = atom === null ? [] : [atom];
    if (quantity !== null && atom !== null) known.set(key, atoms);
    entries.push({ row, place, quantity, atoms });
  }
  return entries.map(({ row, place, quantity, atoms }) =>
    quantity === null || atoms.length === 0
      ? { row, place }
      : {
          row: { ...row, property: `${quantity} of ${atomNames(content.ensemble.elements, atoms)}` },
          place,
        },
  );
}

/**
 * Names of the averaged columns that only count the frames up, so that a page can say that they may be labels. They are
 * averaged like any other property in every file, table, sentence and comparison: what merely looks like a counter may be
 * a property.
 *
 * @example countingProperties(content) // ["frame_id"]
 */
export function countingProperties({ columns, kept }: Pick<EditionContent, "columns" | "kept">): string[] {
  const frames = kept.map(({ frame }) => frame);
  return columns
    .filter(({ kind, unit, values }) => kind === "property" && unit === null && countsUp(frames, values))
    .map(({ name }) => name);
}
