import type { SiftResult } from "../recipe/result.ts";
import { type Coverage, samplingCoverage, type TwoSearches, twoSearches } from "./sampling-coverage.ts";
import type { SearchView } from "./trust-view.ts";

/** What one search found of the distinct set. */
export interface SearchFound {
  name: string;
  /** Frames of it that the sift compared. */
  frames: number;
  /** Places in the distinct set that it found, ascending. */
  places: number[];
  /** Of this search alone; null where it has no frame in the set. */
  coverage: Coverage | null;
}

/**
 * Hits of each conformer by each search: the kept frame and every frame that repeats it.
 *
 * @returns one entry a search, in their order
 */
export function foundBySearch(
  result: Pick<SiftResult, "kept" | "dropped">,
  searches: readonly SearchView[],
): SearchFound[] {
  const place = new Map(result.kept.map((conformer, k) => [conformer.frame, k]));
  const hits = [
    ...result.kept.map((conformer, k) => ({ frame: conformer.frame, place: k })),
    ...result.dropped.flatMap((dropped) => {
      const at = place.get(dropped.repeats);
      return at === undefined ? [] : [{ frame: dropped.frame, place: at }];
    }),
  ];
  return searches.map(({ name, ranges }) => {
    const counts = new Map<number, number>();
    let frames = 0;
    for (const hit of hits) {
      if (!ranges.some(([first, last]) => hit.frame >= first && hit.frame <= last)) continue;
      frames += 1;
      counts.set(hit.place, (counts.get(hit.place) ?? 0) + 1);
    }
    return {
      name,
      frames,
      places: [...counts.keys()].sort((a, b) => a - b),
      coverage: samplingCoverage([...counts.values()]),
    };
  });
}

/** Two halves of a file as if they were searches: for an ensemble that came in one upload. */
export function halvesOf(frames: number): SearchView[] {
  const middle = Math.floor(frames / 2);
  return [
    { name: `Frames 1 to ${middle}`, ranges: [[1, middle]] },
    { name: `Frames ${middle + 1} to ${frames}`, ranges: [[middle + 1, frames]] },
  ];
}

/** Capture and recapture of the first search against all later ones together; null where either is empty. */
export function compareSearches(found: readonly SearchFound[]): TwoSearches | null {
  const [first, ...later] = found;
  if (first === undefined || later.length === 0) return null;
  const rest = new Set(later.flatMap((search) => search.places));
  if (first.places.length === 0 || rest.size === 0) return null;
  const both = first.places.filter((at) => rest.has(at)).length;
  return twoSearches(first.places.length, rest.size, both);
}

/** Conformers of mirror pairs by how often each hand was found; in a set whose images are merged. */
export interface HandCount {
  /** Place in the distinct set. */
  place: number;
  /** Frames of the kept frame's own hand, and of the other. */
  own: number;
  other: number;
}

/**
 * How often each hand of a mirror pair was found.
 *
 * @returns only conformers of degeneracy 2: the others are their own mirror image
 */
export function handsFound(result: SiftResult): HandCount[] {
  const counts = new Map<number, HandCount>();
  const byFrame = new Map<number, HandCount>();
  for (const [place, conformer] of result.kept.entries()) {
    if (conformer.degeneracy !== 2) continue;
    const count = { place, own: 1, other: 0 };
    counts.set(place, count);
    byFrame.set(conformer.frame, count);
  }
  for (const dropped of result.dropped) {
    const count = byFrame.get(dropped.repeats);
    if (!count) continue;
    if (dropped.mirror === true) count.other += 1;
    else count.own += 1;
  }
  return [...counts.values()];
}
