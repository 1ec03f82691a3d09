import type { EditionContent } from "./content.ts";

/**
 * Rows of the distinct set, the most populated first: the order in which coordinates lie beside an edition.
 *
 * @example shownRows(content, 4) // the four that the page draws
 */
export function shownRows(content: Pick<EditionContent, "kept" | "populations">, count: number): number[] {
  const share = (row: number) => content.populations?.values[row]?.population ?? 0;
  return [...content.kept.keys()].sort((a, b) => share(b) - share(a) || a - b).slice(0, count);
}
