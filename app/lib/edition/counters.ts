import { countsUp } from "../averages/counter.ts";
import type { EditionContent } from "./content.ts";

/**
 * The averages that an edition shows: without columns that only count frames up, whose mean says nothing. The files hold
 * one row a column.
 */
export function averagedProperties({
  averages,
  columns,
  kept,
}: Pick<EditionContent, "averages" | "columns" | "kept">): EditionContent["averages"] {
  if (averages === null) return null;
  const frames = kept.map(({ frame }) => frame);
  const counters = new Set(
    columns
      .filter(({ kind, unit, values }) => kind === "property" && unit === null && countsUp(frames, values))
      .map(({ name }) => name),
  );
  return averages.filter(({ property }) => !counters.has(property));
}
