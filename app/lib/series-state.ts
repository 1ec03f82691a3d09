import { capital, countWord, formatCount, plural, pluralWord } from "./format.ts";
import type { EnsembleRow } from "./views.ts";

/** The table of ensembles as its address says: what is looked for, what is left out, how it is sorted. */

export const SORT_KEYS = [
  "name",
  "series",
  "formula",
  "frames",
  "held",
  "distinct",
  "strip",
  "lowest",
  "effective",
  "levels",
  "changed",
] as const;
export type SortKey = (typeof SORT_KEYS)[number];

export const ROW_STATES = ["ready", "asks", "running", "failed", "open"] as const;
/** ready: has its populations or distinct set; asks: a question is open; open: neither sifted nor waiting. */
export type RowState = (typeof ROW_STATES)[number];

export interface SeriesState {
  q: string;
  /** Id of a series; null shows all of the team. */
  series: string | null;
  /** Name of a level. */
  level: string | null;
  state: RowState | null;
  held: "some" | "none" | null;
  sort: { by: SortKey; down: boolean };
  /** From 1. */
  page: number;
}

const DEFAULT_SORT = { by: "changed", down: true } as const;
export const ROWS_A_PAGE = 100;
const MAX_QUERY = 100;

function oneOf<T extends string>(known: readonly T[], text: string | null): T | null {
  return known.find((value) => value === text) ?? null;
}

/** Reads the address; what it does not understand is taken as not said. */
export function readSeriesState(params: URLSearchParams): SeriesState {
  const sort = params.get("sort") ?? "";
  const by = oneOf(SORT_KEYS, sort.replace(/^-/, ""));
  const page = Number(params.get("page"));
  return {
    q: (params.get("q") ?? "").trim().slice(0, MAX_QUERY),
    series: params.get("series") || null,
    level: params.get("level") || null,
    state: oneOf(ROW_STATES, params.get("state")),
    held: oneOf(["some", "none"], params.get("held")),
    sort: by ? { by, down: sort.startsWith("-") } : DEFAULT_SORT,
    page: Number.isInteger(page) && page > 1 ? page : 1,
  };
}

/** Writes the address; what is as usual is left out, so that the plain page has the plain address. */
export function writeSeriesState(state: SeriesState): URLSearchParams {
  const params = new URLSearchParams();
  if (state.series) params.set("series", state.series);
  if (state.q) params.set("q", state.q);
  if (state.level) params.set("level", state.level);
  if (state.state) params.set("state", state.state);
  if (state.held) params.set("held", state.held);
  const { by, down } = state.sort;
  if (by !== DEFAULT_SORT.by || down !== DEFAULT_SORT.down) params.set("sort", `${down ? "-" : ""}${by}`);
  if (state.page > 1) params.set("page", String(state.page));
  return params;
}

/** Columns that open with their largest value; words open from A. */
const DOWN_FIRST: readonly SortKey[] = [
  "frames",
  "held",
  "distinct",
  "strip",
  "lowest",
  "effective",
  "changed",
];

/** The sort after a click on a head: the usual direction first, then the other. */
export function nextSort(sort: SeriesState["sort"], by: SortKey): SeriesState["sort"] {
  return sort.by === by ? { by, down: !sort.down } : { by, down: DOWN_FIRST.includes(by) };
}

export function rowState(row: EnsembleRow): RowState {
  if (row.openQuestions > 0) return "asks";
  if (row.sift === null || row.sift.status === "cancelled") return "open";
  if (row.sift.status === "done") return "ready";
  return row.sift.status === "failed" ? "failed" : "running";
}

function found(row: EnsembleRow, words: readonly string[]): boolean {
  const text = [row.name, row.formula, row.series.name, ...row.levels.map((l) => l.name), ...row.fileNames]
    .join("\n")
    .toLowerCase();
  return words.every((word) => text.includes(word));
}

/** Value of a column, null where there is none yet. */
function sortValue(row: EnsembleRow, by: SortKey): string | number | null {
  switch (by) {
    case "name":
      return row.name;
    case "series":
      return row.series.name;
    case "formula":
      return row.formula;
    case "frames":
      return row.frames;
    case "held":
      return heldFor(row);
    case "distinct":
      return row.sift?.distinct ?? null;
    case "strip":
      return row.sift?.shares[0] ?? null;
    case "lowest":
      return row.sift?.lowest ?? null;
    case "effective":
      return row.sift?.effectiveCount ?? null;
    case "levels":
      return row.levels[0]?.name ?? null;
    case "changed":
      return row.changedAt;
  }
}

// Fixed locale and numeric order: "frame 2" before "frame 10", on server and browser alike.
const collator = new Intl.Collator("en", { numeric: true, sensitivity: "base" });

function compareRows(a: EnsembleRow, b: EnsembleRow, { by, down }: SeriesState["sort"]): number {
  const [x, y] = [sortValue(a, by), sortValue(b, by)];
  // Absent values stand last in either direction.
  if (x === null || y === null) return Number(x === null) - Number(y === null);
  const order = typeof x === "number" && typeof y === "number" ? x - y : collator.compare(`${x}`, `${y}`);
  return down ? -order : order;
}

/**
 * The rows that the state asks for, in its order, equal ones by name and id. Words of the search must all occur in
 * name, formula, series, level or file name, in any case.
 */
export function chooseRows(rows: readonly EnsembleRow[], state: SeriesState): EnsembleRow[] {
  const words = state.q.toLowerCase().split(/\s+/).filter(Boolean);
  return rows
    .filter(
      (row) =>
        (state.series === null || row.series.id === state.series) &&
        (state.level === null || row.levels.some((level) => level.name === state.level)) &&
        (state.state === null || rowState(row) === state.state) &&
        (state.held === null || heldFor(row) > 0 === (state.held === "some")) &&
        found(row, words),
    )
    .sort(
      (a, b) =>
        compareRows(a, b, state.sort) ||
        collator.compare(a.name, b.name) ||
        (a.id < b.id ? -1 : Number(a.id > b.id)),
    );
}

/** True while a search or filter hides rows. */
export function isFiltered(state: SeriesState): boolean {
  return state.q !== "" || state.level !== null || state.state !== null || state.held !== null;
}

/** Names of all levels of the rows, by order of arrival and then by name. */
export function levelNames(rows: readonly EnsembleRow[]): string[] {
  const first = new Map<string, number>();
  for (const { name, ordinal } of rows.flatMap((row) => row.levels)) {
    first.set(name, Math.min(ordinal, first.get(name) ?? ordinal));
  }
  return [...first].sort((a, b) => a[1] - b[1] || collator.compare(a[0], b[0])).map(([name]) => name);
}

/**
 * Marker and name of every level, where each marker means one level and each level has one marker in all rows;
 * else nothing, since a marker belongs to the order of arrival in its own ensemble.
 */
export function levelLegend(rows: readonly EnsembleRow[]): EnsembleRow["levels"] {
  const names = new Map<number, string>();
  const ordinals = new Map<string, number>();
  for (const { name, ordinal } of rows.flatMap((row) => row.levels)) {
    if ((names.get(ordinal) ?? name) !== name || (ordinals.get(name) ?? ordinal) !== ordinal) return [];
    names.set(ordinal, name);
    ordinals.set(name, ordinal);
  }
  return [...names].map(([ordinal, name]) => ({ name, ordinal })).sort((a, b) => a.ordinal - b.ordinal);
}

/**
 * The sentence a series opens with, counted over all its rows.
 *
 * @example // "Nine ensembles, 3,910 frames. Two wait for something: one for an answer, one for its sift."
 */
export function seriesFinding(rows: readonly EnsembleRow[]): string {
  const frames = rows.reduce((sum, row) => sum + row.frames, 0);
  const head = `${capital(pluralWord(rows.length, "ensemble"))}, ${plural(frames, "frame")}.`;
  const count = (state: RowState) => rows.filter((row) => rowState(row) === state).length;
  const waits = [
    { n: count("asks"), for: (n: number) => (n === 1 ? "for an answer" : "for answers") },
    { n: count("running"), for: (n: number) => (n === 1 ? "for its sift" : "for their sifts") },
    { n: count("failed"), for: () => "to be sifted again" },
  ].filter(({ n }) => n > 0);
  const total = waits.reduce((sum, { n }) => sum + n, 0);
  if (total === 0) return head;
  const verb = total === 1 ? "waits" : "wait";
  const parts = waits.map((wait) => `${countWord(wait.n)} ${wait.for(wait.n)}`).join(", ");
  const [only] = waits;
  if (waits.length === 1 && only) return `${head} ${capital(countWord(total))} ${verb} ${only.for(total)}.`;
  return `${head} ${capital(countWord(total))} ${verb} for something: ${parts}.`;
}

/** What a filter leaves: "3 of 9 ensembles". */
export function shownWords(shown: number, total: number): string {
  return `${formatCount(shown)} of ${plural(total, "ensemble")}`;
}

/** Frames held for a reason of their own: those that wait for an answer are no news of the structures. */
function heldFor(row: EnsembleRow): number {
  return row.held - row.waiting;
}
