import { plural } from "../format.ts";
import type { SiftResult } from "../recipe/result.ts";
import { compareSearches, foundBySearch } from "../trust/searches.ts";
import type { SearchView } from "../trust/trust-view.ts";
import type { EditionContent } from "./content.ts";

/**
 * Several searches of one molecule against each other, as Trust has them: what each found of the distinct set, and how
 * many conformers exist by capture and recapture.
 *
 * @returns undefined where all frames are of one search: content made before searches were kept has nothing there either
 */
export function searchesSection(
  result: Pick<SiftResult, "kept" | "dropped">,
  searches: readonly SearchView[],
): EditionContent["searches"] {
  if (searches.length < 2) return undefined;
  const found = foundBySearch(result, searches);
  return {
    each: found.map(({ name, frames, places, coverage }, k) => ({
      name,
      ranges: (searches[k]?.ranges ?? []).map(([first, last]): [number, number] => [first, last]),
      frames,
      found: places.length,
      coverage: coverage?.coverage ?? null,
    })),
    pair: compareSearches(found),
  };
}

/** The searches of an edition as they were frozen: which frames each brought is no result. */
export function searchesOf(content: Pick<EditionContent, "searches">): SearchView[] {
  return (content.searches?.each ?? []).map(({ name, ranges }) => ({ name, ranges }));
}

/** A sentence of the methods text on them; null where there is nothing to compare. */
export function searchSentence({ searches }: Pick<EditionContent, "searches">): string | null {
  if (!searches?.pair) return null;
  return (
    `${plural(searches.each.length, "search was", "searches were")} compared by capture and recapture, the first with all ` +
    "later ones (Univ. Calif. Publ. Stat. 1951, 1, 131)."
  );
}
