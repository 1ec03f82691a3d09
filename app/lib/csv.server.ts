import { isMissing, type NumberStyle, readCell } from "./csv/cells.ts";
import { chooseDelimiter, type Delimiter, SAMPLE_ROWS } from "./csv/dialect.ts";
import { RawColumn } from "./csv/raw-column.ts";
import { type CsvRecord, OpenQuote, RecordSplitter } from "./csv/records.ts";
import { unguardText } from "./export/csv.ts";
import { IntakeRejection } from "./intake/reject.ts";
import type { IntakeMessage } from "./intake/report.ts";
import { decodeText, Utf8Stream } from "./text/decode.ts";
import { hasSteeringCharacters, quoteFound } from "./text/escape.ts";
import { LineBuffer, PIECE_BYTES } from "./text/lines.ts";

export const CSV_READER_VERSION = "csv 1";

export interface TableLimits {
  /** Rows below the header. */
  rows: number;
  columns: number;
  /** Rows times columns. */
  cells: number;
}

export const TABLE_LIMITS: TableLimits = { rows: 100_000, columns: 2_100, cells: 12_000_000 };

/** How a table is to be read, where somebody said; the content decides the rest. */
export interface TableOptions {
  file: string;
  delimiter?: Delimiter | null;
  style?: NumberStyle | null;
  /** Whether the first row names the columns. */
  header?: boolean | null;
  limits?: Partial<TableLimits>;
}

/** A row with other cells than the header has: held, as nobody knows which cell is missing (row C12). */
export interface RaggedRow {
  row: number;
  line: number;
  fields: number;
}

/** A table as read: keys of the first column as text, numbers of the others. */
export interface RawTable {
  file: string;
  delimiter: Delimiter;
  /** False where the first row is data by its looks, or because somebody said so. */
  hasHeader: boolean;
  /** Names as written, empty without a header; one a column, the first included. */
  header: string[];
  /** One a row that is taken. */
  keys: string[];
  rowNumbers: Int32Array;
  lines: Int32Array;
  /** All columns but the first. */
  columns: RawColumn[];
  ragged: RaggedRow[];
  raggedCount: number;
  /** The first rows as written, without the header. */
  preview: string[][];
  messages: IntakeMessage[];
}

const PREVIEW_ROWS = 8;
const LISTED = 100;

/**
 * Reads a table of comma, semicolon, tab or bar separated values, fed with bytes: the first column is the key, every
 * further one a quantity. Keeps numbers, keys and the first faults, whatever the file; time is linear in the bytes.
 *
 * @throws IntakeRejection where the file is refused: no table (C01), decimal commas between commas (C03), a quote that
 *   is never closed (C11), a limit (G11), no text (G04), empty (G06)
 * @example
 * const reader = new TableReader({ file: "dft.csv" });
 * for (const chunk of chunks) reader.push(chunk);
 * const table = reader.end();
 */
export class TableReader {
  private readonly file: string;
  private readonly options: TableOptions;
  private readonly limits: TableLimits;
  private readonly text = new Utf8Stream();
  private readonly lines: LineBuffer;
  /** Lines kept back until the delimiter is known. */
  private waiting: { text: string; line: number }[] | null = [];
  private splitter: RecordSplitter | null = null;
  private delimiter: Delimiter = ",";
  private table: RawTable | null = null;
  private rowNumbers: number[] = [];
  private lineNumbers: number[] = [];
  private legacy = false;
  private steering = false;

  constructor(options: TableOptions) {
    this.file = options.file;
    this.options = options;
    this.limits = { ...TABLE_LIMITS, ...options.limits };
    this.lines = new LineBuffer(options.file);
  }

  /** Takes the next bytes; chunks may end anywhere. */
  push(chunk: Uint8Array): void {
    this.feed(this.text.push(chunk));
  }

  /** The table, once all bytes came. */
  end(): RawTable {
    this.feed(this.text.end());
    this.lines.close();
    this.takeLines();
    if (this.waiting !== null) this.decide();
    this.guarded(() => this.splitter?.end());
    const { table } = this;
    if (table === null) throw this.refuse({ code: "G06", message: "The table has no rows." });
    table.rowNumbers = Int32Array.from(this.rowNumbers);
    table.lines = Int32Array.from(this.lineNumbers);
    this.refuseDecimalCommas(table);
    if (this.legacy) {
      const message = "The text is not UTF-8; it was read as Windows-1252. Names may look odd.";
      table.messages.push({ code: "G03", severity: "remark", file: this.file, message });
    }
    if (this.steering) {
      const message = "Names hold control or text-direction characters; they are shown written out.";
      table.messages.push({ code: "G13", severity: "remark", file: this.file, message });
    }
    return table;
  }

  private feed(bytes: Uint8Array): void {
    for (let at = 0; at < bytes.length; at += PIECE_BYTES) {
      this.lines.append(bytes.subarray(at, at + PIECE_BYTES));
      this.takeLines();
    }
  }

  private takeLines(): void {
    this.guarded(() => {
      while (this.lines.next()) {
        const { text, legacy } = decodeText(this.lines.bytes, this.lines.from, this.lines.to);
        this.legacy ||= legacy;
        this.takeLine(text, this.lines.line);
      }
    });
  }

  private takeLine(text: string, line: number): void {
    if (this.waiting === null) {
      this.takeText(text, line);
      return;
    }
    if (text.trim() !== "" || this.waiting.length > 0) this.waiting.push({ text, line });
    // Cells may hold line breaks: a sample of twice the lines has its rows in nearly every case, and no more is at stake.
    if (this.waiting.length >= 2 * SAMPLE_ROWS + 1) this.decide();
  }

  private decide(): void {
    const kept = this.waiting ?? [];
    this.waiting = null;
    if (kept.length === 0) return;
    const chosen = this.options.delimiter ?? chooseDelimiter(kept.map(({ text }) => text));
    if (chosen === null) throw this.noTable(kept[0]?.text ?? "");
    this.delimiter = chosen;
    this.splitter = new RecordSplitter(chosen);
    this.guarded(() => {
      for (const { text, line } of kept) this.takeText(text, line);
    });
  }

  private takeText(text: string, line: number): void {
    const record = this.splitter?.take(text, line) ?? null;
    if (record === null) return;
    if (this.table === null) this.begin(record);
    else this.takeRow(this.table, record);
  }

  /** The first row: names, or data where it looks so. */
  private begin(record: CsvRecord): void {
    const { cells } = record;
    if (cells.length > this.limits.columns) {
      throw this.refuse({
        code: "G11",
        line: record.line,
        message: `The table has ${cells.length} columns; ${this.limits.columns} is the limit.`,
        hint: "Leave out what is not needed.",
      });
    }
    const hasHeader = this.options.header ?? !looksLikeData(cells);
    this.table = {
      file: this.file,
      delimiter: this.delimiter,
      hasHeader,
      header: cells.map((cell) => (hasHeader ? unguardText(cell.trim()) : "")),
      keys: [],
      rowNumbers: new Int32Array(0),
      lines: new Int32Array(0),
      columns: Array.from({ length: Math.max(0, cells.length - 1) }, () => new RawColumn()),
      ragged: [],
      raggedCount: 0,
      preview: [],
      messages: [],
    };
    if (!hasHeader) this.takeRow(this.table, record);
  }

  private takeRow(table: RawTable, { row, line, cells }: CsvRecord): void {
    const width = table.columns.length + 1;
    if (table.preview.length < PREVIEW_ROWS) table.preview.push(cells.map((cell) => quoteFound(cell.trim())));
    if (cells.length !== width && !(cells.length > width && onlyBlanks(cells, width))) {
      table.raggedCount += 1;
      if (table.ragged.length < LISTED) table.ragged.push({ row, line, fields: cells.length });
      return;
    }
    const rows = table.keys.length + 1;
    if (rows > this.limits.rows || rows * table.columns.length > this.limits.cells)
      throw this.tooLarge(line, rows, table);
    const key = unguardText((cells[0] ?? "").trim());
    this.steering ||= hasSteeringCharacters(key);
    table.keys.push(key);
    this.rowNumbers.push(row);
    this.lineNumbers.push(line);
    for (let k = 1; k < width; k++)
      table.columns[k - 1]?.take(cells[k] ?? "", this.options.style ?? null, row, line);
  }

  /** Rows longer than the header, by the commas inside of their numbers (row C03). */
  private refuseDecimalCommas(table: RawTable): void {
    const [first] = table.ragged.filter(({ fields }) => fields > table.header.length);
    if (table.delimiter !== "," || first === undefined || table.raggedCount <= table.keys.length) return;
    throw this.refuse({
      code: "C03",
      line: first.line,
      message: `Row ${first.row} has ${first.fields} fields, the header has ${table.header.length}.`,
      hint: table.header[0]?.trimStart().startsWith("#")
        ? "Is the first line a comment? Remove it: the first line names the columns."
        : "Are there decimal commas in a table separated by commas? Write decimal points, or separate by semicolons.",
    });
  }

  private tooLarge(line: number, rows: number, table: RawTable): IntakeRejection {
    const what =
      rows > this.limits.rows
        ? `more than ${this.limits.rows.toLocaleString("en-GB")} rows`
        : `more than ${this.limits.cells.toLocaleString("en-GB")} cells (${table.columns.length} columns)`;
    const hint = "Split it into tables of fewer rows or columns.";
    return this.refuse({ code: "G11", line, message: `The table has ${what}.`, hint });
  }

  private noTable(found: string): IntakeRejection {
    return this.refuse({
      code: "C01",
      line: 1,
      found: quoteFound(found),
      message: "This is no table: neither comma, semicolon, tab nor bar separates cells.",
      hint: "The first column is frame or label, every further one a quantity.",
    });
  }

  private refuse(report: Omit<IntakeMessage, "severity" | "file">): IntakeRejection {
    return new IntakeRejection({ file: this.file, ...report });
  }

  /** What is said of lines and quotes belongs to tables here. */
  private guarded(work: () => void): void {
    try {
      work();
    } catch (error) {
      if (error instanceof OpenQuote) {
        const { line } = error;
        throw this.refuse({
          code: "C11",
          line,
          message: "A quote opens here and is never closed.",
          hint: "Close it, or double it where it stands for itself.",
        });
      }
      if (!(error instanceof IntakeRejection)) throw error;
      const { severity: _, ...report } = error.report;
      if (report.code === "G11" && report.hint?.startsWith("XYZ")) {
        throw new IntakeRejection({
          ...report,
          hint: "A row of a table is shorter: is this the right file?",
        });
      }
      throw report.code === "G04"
        ? new IntakeRejection({ ...report, hint: "Export the table as CSV." })
        : error;
    }
  }
}

function onlyBlanks(cells: readonly string[], from: number): boolean {
  return cells.slice(from).every((cell) => cell.trim() === "");
}

/** No name among the cells: numbers, values that are missing, and at most a label in front. */
function looksLikeData(cells: readonly string[]): boolean {
  const isNumber = (cell: string) => ["number", "styled"].includes(readCell(cell, null).kind);
  const behind = cells.slice(1);
  return behind.some(isNumber) && behind.every((cell) => isNumber(cell) || isMissing(cell));
}
