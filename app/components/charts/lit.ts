import { plural } from "~/lib/format";
import type { ConformerRow } from "~/lib/workbench/conformers";

/** What stands out in a figure while the table below it is narrowed: the others are drawn pale. */
export interface Lit {
  /** Positions in the distinct set. */
  rows: ReadonlySet<number>;
  /** What they have in common: "found by batch 2 alone". */
  words: string;
}

export const PALE = 0.25;

/** The sentence below the figure; null where nothing is pale. */
export function litNote(lit: Lit | null): string | null {
  return lit === null
    ? null
    : `${plural(lit.rows.size, "conformer")} ${lit.words}; the others are drawn pale.`;
}

/** What a figure says of a conformer where there were several searches: ", found by batch 2: 3". */
export function foundInNote({ foundIn }: Pick<ConformerRow, "foundIn">): string {
  return foundIn ? `; found by ${foundIn}` : "";
}

/** The last column of a figure's table, where there were several searches. */
export function foundByColumn(rows: readonly Pick<ConformerRow, "foundIn">[]): {
  head: { name: string }[];
  cell: (row: Pick<ConformerRow, "foundIn">) => (string | null)[];
} {
  return rows.some(({ foundIn }) => foundIn)
    ? { head: [{ name: "found by" }], cell: ({ foundIn }) => [foundIn ?? null] }
    : { head: [], cell: () => [] };
}
