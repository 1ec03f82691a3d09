import { isMissing, readCell } from "./cells.ts";
import { type CsvRecord, OpenQuote, RecordSplitter } from "./records.ts";

/** What may stand between cells (row C01). */
export const DELIMITERS = [",", ";", "\t", "|"] as const;
export type Delimiter = (typeof DELIMITERS)[number];

/** Rows that decide. */
export const SAMPLE_ROWS = 20;

export const DELIMITER_NAMES: Record<Delimiter, string> = {
  ",": "comma",
  ";": "semicolon",
  "\t": "tab",
  "|": "bar",
};

function recordsOf(lines: readonly string[], delimiter: Delimiter): CsvRecord[] {
  const splitter = new RecordSplitter(delimiter);
  const records: CsvRecord[] = [];
  try {
    lines.forEach((text, k) => {
      const record = splitter.take(text, k + 1);
      if (record && records.length < SAMPLE_ROWS) records.push(record);
    });
  } catch (error) {
    if (!(error instanceof OpenQuote)) throw error;
  }
  return records;
}

interface Score {
  delimiter: Delimiter;
  /** Share of rows with as many cells as most of them, 0 without a second cell. */
  equal: number;
  /** Share of cells below the header that can be numbers. */
  numeric: number;
  cells: number;
}

function score(lines: readonly string[], delimiter: Delimiter): Score {
  const records = recordsOf(lines, delimiter);
  const counts = new Map<number, number>();
  for (const { cells } of records) counts.set(cells.length, (counts.get(cells.length) ?? 0) + 1);
  const [most = 0, rows = 0] = [...counts].sort((a, b) => b[1] - a[1] || b[0] - a[0])[0] ?? [];
  const below = records.slice(1).flatMap(({ cells }) => cells.slice(1));
  const numbers = below.filter((cell) => isMissing(cell) || readCell(cell, null).kind !== "text").length;
  return {
    delimiter,
    equal: most > 1 && records.length > 0 ? rows / records.length : 0,
    numeric: below.length === 0 ? 0 : numbers / below.length,
    cells: most,
  };
}

/**
 * The delimiter of a table: the one that gives equal counts over the first 20 rows; of several the one whose cells are
 * numbers, then the one with more cells. Null where none gives a second cell.
 *
 * @param lines the first lines, whole
 * @example chooseDelimiter(["frame;E", "1;0,5", "2;0,7"]) // ";"
 */
export function chooseDelimiter(lines: readonly string[]): Delimiter | null {
  const scores = DELIMITERS.map((delimiter) => score(lines, delimiter)).filter(({ equal }) => equal > 0);
  scores.sort((a, b) => b.equal - a.equal || b.numeric - a.numeric || b.cells - a.cells);
  return scores[0]?.delimiter ?? null;
}
