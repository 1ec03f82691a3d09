import {
  capital,
  fixed,
  formatCount,
  formatEnergy,
  formatPercent,
  formatTemperature,
  plural,
  pluralWord,
  withUnit,
} from "../format.ts";
import { conformerName } from "../workbench/conformers.ts";
import { joinWords } from "../workbench/findings.ts";
import { ATOM_SET_WORDS } from "../workbench/recipe-words.ts";
import type { EditionContent } from "./content.ts";
import { atomNames } from "./measured.ts";
import { whyNoAverage } from "./why-no-average.ts";

/** One setting or count that differs, as both editions have it. */
export interface EditionChange {
  what: string;
  before: string;
  after: string;
}

/** A conformer in one edition or both. */
export interface ComparedConformer {
  frame: number;
  /** "c3"; null where it is no conformer of that edition. */
  before: string | null;
  after: string | null;
  populationBefore: number | null;
  populationAfter: number | null;
  /** 95 % ranges, fractions; null where the edition gives none. */
  rangeBefore: readonly [number, number] | null;
  rangeAfter: readonly [number, number] | null;
  /** What became of it, where it stands in one edition only. */
  note: string | null;
}

export interface EditionComparison {
  /** What changed, in short words; one entry at least. */
  words: string[];
  changes: EditionChange[];
  /** Those of the later edition in its order, then those that are gone. */
  conformers: ComparedConformer[];
  /** Properties of either edition. */
  averages: ComparedAverage[];
  /** What was open in the one and not in the other, by title. */
  open: { settled: string[]; added: string[] };
}

/** A property in one edition or both, each with the standard deviation that the error of its level makes. */
export interface ComparedAverage {
  property: string;
  unit: string | null;
  before: number | null;
  after: number | null;
  sdBefore: number | null;
  sdAfter: number | null;
  /** Why the edition gives no average; null where it gives one. */
  noneBefore: string | null;
  noneAfter: string | null;
  /** True where the change is larger than both uncertainties together; null where one of them is not known. */
  beyond: boolean | null;
}

/** What a comparison looks at; the state of an ensemble that is not frozen yet has it too. */
export type Comparable = Pick<
  EditionContent,
  | "version"
  | "ensemble"
  | "inputs"
  | "level"
  | "recipe"
  | "kept"
  | "dropped"
  | "held"
  | "outsideWindow"
  | "populations"
  | "averages"
  | "uncertainty"
  | "temperatures"
  | "open"
  | "splits"
  | "measured"
  | "measuredProperties"
> & { columns: readonly { name: string; sha256: string }[] };

const NOT_THERE = "it has no such average";
/** Populations nearer than this print alike. */
const SAME_POPULATION = 5e-4;
const UNCHANGED = "populations unchanged";

/**
 * What changed from one edition to a later one, in words and numbers. Frames keep their numbers for good, so conformers are
 * matched by frame.
 *
 * @example compareEditions(first, second).words // ["column shift added", "populations unchanged"]
 */
export function compareEditions(before: Comparable, after: Comparable): EditionComparison {
  const changes = changesOf(before, after).filter((change) => change.before !== change.after);
  const conformers = compareConformers(before, after);
  const averages = compareAverages(before, after);
  const open = compareOpen(before, after);
  const words = [
    fileWords(before, after),
    ...changes.map((change) => `${change.what}: ${change.after} instead of ${change.before}`),
    ...columnWords(before, after),
    ...measuredWords(before, after),
    heldWords(before, after),
    populationWords(before, after, conformers),
    averageWords(averages),
    ...openWords(open),
  ].filter((word) => word !== null);
  const nothing = words.every((word) => word === UNCHANGED);
  return { words: nothing ? ["nothing changed"] : words, changes, conformers, averages, open };
}

/**
 * What a state that is not frozen yet changes since an edition: it has no draws, averages or list of what is open to compare.
 *
 * @example changesSince(last, draft) // ["temperature: 310 K instead of 298.15 K"]
 */
export function changesSince(before: Comparable, draft: Comparable): string[] {
  const { uncertainty, temperatures, averages, open } = before;
  return compareEditions(before, { ...draft, uncertainty, temperatures, averages, open }).words;
}

function compareAverages(a: Comparable, b: Comparable): ComparedAverage[] {
  const [before, after] = [a, b].map(
    ({ averages }) => new Map((averages ?? []).map((row) => [`${row.property}\n${row.unit ?? ""}`, row])),
  );
  const keys = [...new Set([...(after?.keys() ?? []), ...(before?.keys() ?? [])])];
  return keys.map((key) => {
    const [old, now] = [before?.get(key), after?.get(key)];
    const [sdBefore, sdAfter] = [old?.error?.sd ?? null, now?.error?.sd ?? null];
    const [from, to] = [old?.average ?? null, now?.average ?? null];
    const known = from !== null && to !== null && sdBefore !== null && sdAfter !== null;
    return {
      property: (now ?? old)?.property ?? "",
      unit: (now ?? old)?.unit ?? null,
      before: from,
      after: to,
      sdBefore,
      sdAfter,
      noneBefore: old === undefined ? NOT_THERE : whyNoAverage(old),
      noneAfter: now === undefined ? NOT_THERE : whyNoAverage(now),
      beyond: known ? Math.abs(to - from) > sdBefore + sdAfter : null,
    };
  });
}

/**
 * How the change of an average stands against its uncertainty, or why that cannot be said.
 *
 * @example againstUncertainty(row, 1, 2) // "edition 2: covers 43 % of the population: no average below 90 %"
 */
export function againstUncertainty(row: ComparedAverage, before: number, after: number): string {
  if (row.beyond !== null) return row.beyond ? "larger" : "within it";
  const { noneBefore, noneAfter } = row;
  if (noneBefore !== null && noneBefore === noneAfter) return `in both: ${noneBefore}`;
  const none = [
    noneBefore === null ? null : `edition ${before}: ${noneBefore}`,
    noneAfter === null ? null : `edition ${after}: ${noneAfter}`,
  ].filter((words) => words !== null);
  if (none.length > 0) return none.join("; ");
  const bare = [row.sdBefore === null ? before : null, row.sdAfter === null ? after : null].filter(
    (number) => number !== null,
  );
  return `edition ${bare.join(" and ")}: no uncertainty, since no error of the level was given`;
}

/** Two averages that print alike at six figures are the same. */
const differs = ({ before, after }: ComparedAverage) =>
  before !== after && (before === null || after === null || before.toPrecision(6) !== after.toPrecision(6));

function averageWords(averages: readonly ComparedAverage[]): string | null {
  const both = averages.filter(({ before, after }) => before !== null && after !== null);
  const moved = both.filter(differs);
  if (moved.length === 0) return null;
  const beyond = moved.filter(({ beyond }) => beyond === true).length;
  const known = moved.every((one) => one.beyond !== null);
  const how = !known
    ? ""
    : beyond === 0
      ? ", none by more than its uncertainty"
      : `, ${formatCount(beyond)} by more than ${beyond === 1 ? "its" : "their"} uncertainty`;
  return `${formatCount(moved.length)} of ${plural(both.length, "average")} moved${how}`;
}

function compareOpen(a: Comparable, b: Comparable): EditionComparison["open"] {
  const titles = ({ open }: Comparable) => open.map(({ title }) => title);
  const [before, after] = [titles(a), titles(b)];
  // The first editions kept no list: nothing can be said of them.
  if (a.version === 1 || b.version === 1) return { settled: [], added: [] };
  return {
    settled: before.filter((title) => !after.includes(title)),
    added: after.filter((title) => !before.includes(title)),
  };
}

function openWords({ settled, added }: EditionComparison["open"]): string[] {
  return [
    ...(settled.length > 0 ? [`${plural(settled.length, "finding")} no longer open`] : []),
    ...(added.length > 0 ? [`${plural(added.length, "finding")} newly open`] : []),
  ];
}

/** The words on a first edition, which nothing stands before. */
export function firstWords(content: Pick<EditionContent, "kept" | "level">): string {
  return `the first: ${plural(content.kept.length, "conformer")}, ${content.level?.name ?? "without energies"}`;
}

const energy = (value: number | null) =>
  value === null ? "none" : withUnit(formatEnergy(value), "kcal/mol");

function changesOf(a: Comparable, b: Comparable): EditionChange[] {
  const pair = (what: string, of: (content: Comparable) => string): EditionChange => ({
    what,
    before: of(a),
    after: of(b),
  });
  return [
    pair("conformers", ({ kept }) => formatCount(kept.length)),
    pair("accepted frames", ({ ensemble }) => formatCount(ensemble.accepted)),
    pair("level", ({ level }) => level?.name ?? "none"),
    pair("temperature", ({ populations }) =>
      populations === null ? "none" : withUnit(formatTemperature(populations.temperature), "K"),
    ),
    pair("error of the level", ({ uncertainty }) =>
      uncertainty === null ? "not given" : withUnit(formatEnergy(uncertainty.sigma), "kcal/mol"),
    ),
    pair("further temperatures", ({ temperatures }) =>
      temperatures === null
        ? "none"
        : withUnit(temperatures.kelvin.map((kelvin) => formatTemperature(kelvin)).join(", "), "K"),
    ),
    pair("weights", ({ populations }) => populations?.weights ?? "none"),
    pair("energy tolerance", ({ recipe }) => energy(recipe.energyTolerance)),
    pair("RMSD tolerance", ({ recipe }) => withUnit(fixed(recipe.rmsdTolerance, 3), "Å")),
    pair("window", ({ recipe }) => energy(recipe.window)),
    pair("atoms compared", ({ recipe }) => ATOM_SET_WORDS[recipe.atoms]),
    pair("exchange of equivalent atoms", ({ recipe }) => (recipe.symmetry ? "on" : "off")),
    pair("mirror images", ({ recipe }) => (recipe.mirror === "merge" ? "merged" : "kept apart")),
    pair("taken as", ({ recipe }) => recipe.chirality),
    pair("groups taken apart by hand", ({ splits, ensemble }) =>
      splits === undefined
        ? "none"
        : splits
            .map((parts) => parts.map((part) => atomNames(ensemble.elements, part)).join(" | "))
            .join("; "),
    ),
  ];
}

/** Of which quantities measured values came, changed or went. */
function measuredWords(a: Comparable, b: Comparable): string[] {
  const [before, after] = [a, b].map(
    ({ measured, measuredProperties }) =>
      new Map([
        ...(measured ?? []).map(({ quantity, stated }) => [quantity, JSON.stringify(stated)] as const),
        ...(measuredProperties?.stated.values ?? []).map(([name, value]) => [name, String(value)] as const),
      ]),
  );
  const [was, is] = [before ?? new Map<string, string>(), after ?? new Map<string, string>()];
  return [...new Set([...is.keys(), ...was.keys()])]
    .filter((quantity) => was.get(quantity) !== is.get(quantity))
    .map((quantity) => {
      const what = !was.has(quantity) ? "added" : is.has(quantity) ? "changed" : "gone";
      return `measured values of ${quantity} ${what}`;
    });
}

function fileWords(a: Comparable, b: Comparable): string | null {
  const known = new Set(a.inputs.files.map(({ sha256 }) => sha256));
  const added = b.inputs.files.filter(({ sha256 }) => !known.has(sha256));
  return added.length === 0
    ? null
    : `${pluralWord(added.length, "file")} added: ${joinWords(added.map(({ name }) => name))}`;
}

function columnWords(a: Comparable, b: Comparable): string[] {
  const before = new Map(a.columns.map(({ name, sha256 }) => [name, sha256]));
  const after = new Set(b.columns.map(({ name }) => name));
  const named = (names: string[], what: string) =>
    names.length === 0
      ? []
      : names.length > 4
        ? [`${pluralWord(names.length, "column")} ${what}`]
        : [`${names.length === 1 ? "column" : "columns"} ${joinWords(names)} ${what}`];
  const names = (columns: readonly { name: string }[]) => columns.map(({ name }) => name);
  return [
    ...named(names(b.columns.filter(({ name }) => !before.has(name))), "added"),
    ...named(
      names(b.columns.filter(({ name, sha256 }) => before.has(name) && before.get(name) !== sha256)),
      "with other numbers",
    ),
    ...named(names(a.columns.filter(({ name }) => !after.has(name))), "gone"),
  ];
}

function heldWords(a: Comparable, b: Comparable): string | null {
  const before = new Set(a.held.map(({ frame }) => frame));
  const after = new Set(b.held.map(({ frame }) => frame));
  const held = [...after].filter((frame) => !before.has(frame)).length;
  const released = [...before].filter((frame) => !after.has(frame)).length;
  const parts = [
    held > 0 ? `${plural(held, "frame")} more held` : null,
    released > 0 ? `${plural(released, "frame")} released` : null,
  ].filter((part) => part !== null);
  return parts.length === 0 ? null : parts.join(", ");
}

function populationWords(
  a: Comparable,
  b: Comparable,
  conformers: readonly ComparedConformer[],
): string | null {
  if (a.populations === null || b.populations === null) return null;
  let largest: ComparedConformer | null = null;
  const change = (one: ComparedConformer) =>
    Math.abs((one.populationAfter ?? 0) - (one.populationBefore ?? 0));
  for (const one of conformers) if (largest === null || change(one) > change(largest)) largest = one;
  if (largest === null || change(largest) < SAME_POPULATION) return UNCHANGED;
  const from = formatPercent(largest.populationBefore ?? 0, 1);
  const to = formatPercent(largest.populationAfter ?? 0, 1);
  const name = largest.after ?? largest.before;
  return `largest change of a population: ${name} (frame ${largest.frame}) from ${from} to ${to}${rangeWords(largest)}`;
}

/** Whether the later population lies in the range that the earlier edition gave. */
function rangeWords({ rangeBefore, populationAfter }: ComparedConformer): string {
  if (rangeBefore === null || populationAfter === null) return "";
  const [low, high] = rangeBefore;
  return populationAfter >= low && populationAfter <= high
    ? ", within the 95 % range it had"
    : ", outside the 95 % range it had";
}

function compareConformers(a: Comparable, b: Comparable): ComparedConformer[] {
  const before = placesOf(a);
  const after = placesOf(b);
  const row = (frame: number): ComparedConformer => ({
    frame,
    before: before.get(frame)?.name ?? null,
    after: after.get(frame)?.name ?? null,
    populationBefore: before.get(frame)?.population ?? null,
    populationAfter: after.get(frame)?.population ?? null,
    rangeBefore: before.get(frame)?.range ?? null,
    rangeAfter: after.get(frame)?.range ?? null,
    note: before.has(frame)
      ? after.has(frame)
        ? null
        : fate(frame, b, after, "now")
      : fate(frame, a, before, "before"),
  });
  const gone = a.kept.filter(({ frame }) => !after.has(frame));
  return [...b.kept, ...gone].map(({ frame }) => row(frame));
}

interface Place {
  name: string;
  population: number | null;
  range: readonly [number, number] | null;
}

function placesOf({ kept, populations, uncertainty }: Comparable): Map<number, Place> {
  return new Map(
    kept.map(({ frame }, index) => {
      const drawn = uncertainty?.populations[index];
      const population = populations?.values[index]?.population ?? null;
      return [
        frame,
        { name: conformerName(index), population, range: drawn ? [drawn.low, drawn.high] : null },
      ];
    }),
  );
}

/** What a frame was in the edition that does not have it as a conformer. */
function fate(
  frame: number,
  content: Comparable,
  places: ReadonlyMap<number, { name: string }>,
  when: "now" | "before",
): string {
  const repeat = content.dropped.find((one) => one.frame === frame);
  if (repeat) return `${when} a repeat of ${places.get(repeat.repeats)?.name ?? `frame ${repeat.repeats}`}`;
  if (content.held.some((one) => one.frame === frame)) return `${when} held`;
  if (content.outsideWindow.includes(frame)) return `${when} above the window`;
  return when === "now" ? "now without part" : "not there before";
}

/** The words as one sentence. */
export function changeSentence(words: readonly string[]): string {
  return `${capital(words.join("; "))}.`;
}
