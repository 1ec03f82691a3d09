import { quoteFound } from "../text/escape.ts";
import { type NumberStyle, readCell } from "./cells.ts";

/** Text where a number should be. Rows and lines count from 1. */
export interface TextCell {
  row: number;
  line: number;
  found: string;
}

/** Texts that are kept for the report; the rest is counted. */
const LISTED = 100;

/** One column of a table while its rows come: numbers in a growing array, no text but what is listed. */
export class RawColumn {
  private numbers = new Float64Array(64);
  private marks = new Uint8Array(64);
  private length = 0;
  /** Cells with a number. */
  count = 0;
  /** Most decimals of any number. */
  decimals = 0;
  /** Cells that hold text, the first of them, and cells that are numbers by another style. */
  textCount = 0;
  readonly texts: TextCell[] = [];
  readonly styled = new Map<NumberStyle, number>();
  styledCount = 0;
  /** As `styled`, the first of them as written. */
  styledExample: TextCell | null = null;
  /** Units behind numbers, and how many numbers have none. */
  readonly units = new Map<string, number>();
  unitless = 0;

  take(cell: string, style: NumberStyle | null, row: number, line: number): void {
    if (this.length === this.numbers.length) this.grow();
    const at = this.length++;
    const read = readCell(cell, style);
    switch (read.kind) {
      case "missing":
        return;
      case "number":
        this.numbers[at] = read.value;
        this.marks[at] = 1;
        this.count += 1;
        if (read.decimals > this.decimals) this.decimals = read.decimals;
        if (read.unit === null) this.unitless += 1;
        else if (this.units.size < 16 || this.units.has(read.unit))
          this.units.set(read.unit, (this.units.get(read.unit) ?? 0) + 1);
        return;
      case "styled":
        this.styledCount += 1;
        this.styledExample ??= { row, line, found: quoteFound(cell.trim()) };
        for (const look of read.looks) this.styled.set(look, (this.styled.get(look) ?? 0) + 1);
        return;
      case "text":
        this.textCount += 1;
        if (this.texts.length < LISTED) this.texts.push({ row, line, found: quoteFound(cell.trim()) });
    }
  }

  /** A row without this cell. */
  skip(): void {
    if (this.length === this.numbers.length) this.grow();
    this.length += 1;
  }

  private grow(): void {
    const numbers = new Float64Array(2 * this.length);
    numbers.set(this.numbers);
    this.numbers = numbers;
    const marks = new Uint8Array(2 * this.length);
    marks.set(this.marks);
    this.marks = marks;
  }

  /** One a row: its number, 0 where there is none. */
  get values(): Float64Array {
    return this.numbers.subarray(0, this.length);
  }

  /** One a row: 1 where it has a number. */
  get present(): Uint8Array {
    return this.marks.subarray(0, this.length);
  }
}
