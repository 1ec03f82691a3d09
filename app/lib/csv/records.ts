/** Cells of one row of a table, as written but for their quotes. */
export interface CsvRecord {
  /** From 1, the header counted, rows of blanks left out. */
  row: number;
  /** Line on which it begins, from 1. */
  line: number;
  cells: string[];
}

/** A quote that nothing closes; `line` is where it opened. */
export class OpenQuote extends Error {
  override name = "OpenQuote";
  constructor(readonly line: number) {
    super(`The quote that opens on line ${line} is never closed.`);
  }
}

/** Longest cell, in characters: a quote that nothing closes must not gather the rest of the file. */
const MAX_CELL = 65_536;

/**
 * Splits lines into rows of cells by RFC 4180 with any delimiter: quotes round a cell, doubled quotes and line breaks
 * inside of them. A quote inside of a bare cell is text. Line breaks in cells become "\n".
 *
 * @example new RecordSplitter(",").take('1,"a, ""b"""', 1)?.cells // ["1", 'a, "b"']
 */
export class RecordSplitter {
  private readonly delimiter: string;
  private cells: string[] = [];
  /** The quoted cell that goes on on the next line. */
  private open: string | null = null;
  private openedAt = 0;
  private begun = 0;
  private rows = 0;

  constructor(delimiter: string) {
    this.delimiter = delimiter;
  }

  /**
   * Takes the next line.
   *
   * @returns the row that it completes; null inside of a quoted cell, and for a line of blanks
   * @throws OpenQuote where a quoted cell grows beyond every measure
   */
  take(text: string, line: number): CsvRecord | null {
    if (this.open === null) {
      if (text.trim() === "" && !text.includes(this.delimiter)) return null;
      this.begun = line;
      this.cells = [];
    }
    this.split(text, line);
    if (this.open !== null) return null;
    // A spreadsheet's empty rows: nothing but delimiters.
    if (this.cells.every((cell) => cell.trim() === "")) return null;
    this.rows += 1;
    return { row: this.rows, line: this.begun, cells: this.cells };
  }

  /** @throws OpenQuote where the last quote was never closed */
  end(): void {
    if (this.open !== null) throw new OpenQuote(this.openedAt);
  }

  private split(text: string, line: number): void {
    const { delimiter } = this;
    let at = this.open === null ? 0 : this.quoted(text, 0, `${this.open}\n`);
    if (this.open === null && at > text.length) return;
    while (this.open === null) {
      const begin = skipBlanks(text, at, delimiter);
      if (text[begin] === '"') {
        this.openedAt = line;
        at = this.quoted(text, begin + 1, "");
      } else {
        const end = text.indexOf(delimiter, at);
        this.cells.push(end < 0 ? text.slice(at) : text.slice(at, end));
        at = end < 0 ? text.length + 1 : end + 1;
      }
      if (at > text.length) return;
    }
  }

  /**
   * Reads on in a quoted cell; where it closes, the cell is put down.
   *
   * @returns where the next cell begins, beyond the end where this was the last
   */
  private quoted(text: string, from: number, before: string): number {
    let cell = before;
    let at = from;
    for (;;) {
      const quote = text.indexOf('"', at);
      if (quote < 0) {
        this.open = cell + text.slice(at);
        if (this.open.length > MAX_CELL) throw new OpenQuote(this.openedAt);
        return text.length + 1;
      }
      cell += text.slice(at, quote);
      at = quote + 1;
      if (text[at] !== '"') break;
      cell += '"';
      at += 1;
    }
    const end = text.indexOf(this.delimiter, at);
    // What stands between the closing quote and the delimiter belongs to the cell: it is lost otherwise.
    const rest = end < 0 ? text.slice(at) : text.slice(at, end);
    this.open = null;
    this.cells.push(rest.trim() === "" ? cell : cell + rest);
    return end < 0 ? text.length + 1 : end + 1;
  }
}

function skipBlanks(text: string, from: number, delimiter: string): number {
  let at = from;
  while ((text[at] === " " || text[at] === "\t") && text[at] !== delimiter) at += 1;
  return at;
}
