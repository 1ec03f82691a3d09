import { pluralWord } from "../format.ts";
import type { FileView } from "../views.ts";
import type { ConformerRow } from "./conformers.ts";
import { joinWords, shareFigure } from "./findings.ts";

/** What a table is narrowed to, where an ensemble grew by further searches or batches. */
export type FoundBy = { kind: "any-of" | "only"; batch: number } | { kind: "several" };

export interface FoundByChoice {
  /** As it stands in the address. */
  value: string;
  label: string;
}

const WRITTEN = /^(only-)?([1-9]\d{0,4})$/;
/** Batches that a cell lists; more are counted. */
const MOST_LISTED = 3;

/**
 * Reads the choice from an address; what cannot be read is no choice.
 *
 * @example readFoundBy("only-2") // { kind: "only", batch: 2 }
 */
export function readFoundBy(text: string | null): FoundBy | null {
  if (text === "several") return { kind: "several" };
  const found = WRITTEN.exec(text ?? "");
  return found ? { kind: found[1] ? "only" : "any-of", batch: Number(found[2]) } : null;
}

/** The choice as it stands in an address: "2", "only-2", "several". */
export function writeFoundBy(choice: FoundBy): string {
  return choice.kind === "several" ? "several" : `${choice.kind === "only" ? "only-" : ""}${choice.batch}`;
}

export function isFoundBy({ batches }: Pick<ConformerRow, "batches">, choice: FoundBy): boolean {
  if (!batches) return false;
  if (choice.kind === "several") return batches.length > 1;
  return batches.includes(choice.batch) && (choice.kind === "any-of" || batches.length === 1);
}

/** How a batch is called: its number, and the name that its people gave it. */
export function batchName(batch: number, files: readonly Pick<FileView, "batch" | "batchName">[]): string {
  const name = files.find((file) => file.batch === batch)?.batchName;
  return `batch ${batch}${name ? ` “${name}”` : ""}`;
}

/** "found by batch 2 alone": what the rows that are left have in common. */
export function foundByWords(
  choice: FoundBy,
  files: readonly Pick<FileView, "batch" | "batchName">[],
): string {
  if (choice.kind === "several") return "found by more than one batch";
  return `found by ${batchName(choice.batch, files)}${choice.kind === "only" ? " alone" : ""}`;
}

/** Every choice that leaves something, with the number of conformers that it leaves; none where there is one batch. */
export function foundByChoices(
  rows: readonly ConformerRow[],
  files: readonly Pick<FileView, "batch" | "batchName">[],
): FoundByChoice[] {
  const batches = batchesOf(rows, files);
  if (batches.length < 2) return [];
  const choices: FoundBy[] = [
    ...batches.map((batch) => ({ kind: "any-of" as const, batch })),
    ...batches.map((batch) => ({ kind: "only" as const, batch })),
    { kind: "several" },
  ];
  return choices.flatMap((choice) => {
    const count = rows.filter((row) => isFoundBy(row, choice)).length;
    if (count === 0) return [];
    return [{ value: writeFoundBy(choice), label: `Found by ${labelOf(choice, files)} (${count})` }];
  });
}

function labelOf(choice: FoundBy, files: readonly Pick<FileView, "batch" | "batchName">[]): string {
  return foundByWords(choice, files).replace("found by ", "");
}

/** Batches that brought frames or found a conformer, in order; none where nothing is known of them. */
function batchesOf(rows: readonly ConformerRow[], files: readonly Pick<FileView, "batch">[]): number[] {
  if (!rows.some(({ batches }) => batches)) return [];
  const found = new Set([
    ...files.map(({ batch }) => batch),
    ...rows.flatMap(({ batches }) => batches ?? []),
  ]);
  return [...found].sort((a, b) => a - b);
}

/**
 * A cell of the table: "1, 2", "2 only" of a conformer that one batch alone found, "5 of 8" of many.
 *
 * @param of batches in all
 */
export function batchesCell(batches: readonly number[], of: number): string {
  if (batches.length === 1) return `${batches[0]} only`;
  return batches.length <= MOST_LISTED ? batches.join(", ") : `${batches.length} of ${of}`;
}

/**
 * What the searches have in common, in a sentence: how much each found alone is how much the others missed.
 *
 * @returns null where there is one batch
 * @example foundBySentence(rows, files) // "Both batches found 21 conformers; batch 1 alone found 7 (12.0 %) and batch 2 alone none."
 */
export function foundBySentence(
  rows: readonly ConformerRow[],
  files: readonly Pick<FileView, "batch" | "batchName">[],
): string | null {
  const batches = batchesOf(rows, files);
  if (batches.length < 2) return null;
  const several = rows.filter((row) => isFoundBy(row, { kind: "several" })).length;
  const alone = batches.map((batch) => {
    const own = rows.filter((row) => isFoundBy(row, { kind: "only", batch }));
    const share = own.reduce((sum, row) => sum + (row.population ?? 0), 0);
    const weighed = own.some(({ population }) => population !== null);
    const weight = own.length > 0 && weighed ? ` (${shareFigure(share)} of the population)` : "";
    return { batch, count: own.length, words: `${own.length === 0 ? "none" : own.length}${weight}` };
  });
  const shown = batches.length <= MOST_LISTED ? alone : alone.filter(({ count }) => count > 0);
  const who = batches.length === 2 ? "Both batches" : "More than one batch";
  const both = `${who} found ${several === 0 ? "no conformer" : pluralWord(several, "conformer")}`;
  if (shown.length === 0) return `${both}; none was found by one batch alone.`;
  return `${both}; ${joinWords(shown.map(({ batch, words }) => `${batchName(batch, files)} alone found ${words}`))}.`;
}
