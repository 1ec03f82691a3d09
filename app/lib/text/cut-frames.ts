import { LineBuffer, PIECE_BYTES } from "./lines.ts";

/** Where a frame stands in its file: the line its reader names it by, and the line that the next one begins at. */
export interface FramePlace {
  /** From 1. */
  line: number;
  /** Null for the last frame of the file. */
  next: number | null;
}

const LF = 10;

/**
 * Cuts frames out of a structure file as they stand, byte for byte but for the ends of their lines, which become LF.
 * Nothing of the other frames is kept, so that a file of any size passes through.
 *
 * @param options.records true for SDF, where a frame is what stands between two lines `$$$$`; an XYZ frame reaches from
 *   its count line to the next one
 * @example
 * const cutter = new FrameCutter({ file: "a.xyz", records: false, places: [{ line: 5, next: 9 }] });
 * for (const chunk of chunks) out.push(...cutter.push(chunk));
 * out.push(...cutter.end());
 */
export class FrameCutter {
  readonly #lines: LineBuffer;
  readonly #records: boolean;
  readonly #places: readonly FramePlace[];
  #next = 0;
  /** Lines of the record under way, and the number of its first line. */
  #record: Uint8Array[] = [];
  #begin = 1;

  constructor(options: { file: string; records: boolean; places: readonly FramePlace[] }) {
    this.#lines = new LineBuffer(options.file);
    this.#records = options.records;
    this.#places = [...options.places].sort((a, b) => a.line - b.line);
  }

  /** True once every wanted frame was cut: the rest of the file need not be read. */
  get done(): boolean {
    return this.#next >= this.#places.length;
  }

  /** @returns what of the wanted frames became complete, in the order of the file */
  push(bytes: Uint8Array): Uint8Array[] {
    const found: Uint8Array[] = [];
    for (let at = 0; at < bytes.length && !this.done; at += PIECE_BYTES) {
      this.#lines.append(bytes.subarray(at, at + PIECE_BYTES));
      this.#take(found);
    }
    return found;
  }

  end(): Uint8Array[] {
    const found: Uint8Array[] = [];
    this.#lines.close();
    this.#take(found);
    if (this.#records && !this.done && this.#record.length > 0) this.#endRecord(this.#lines.line, found);
    return found;
  }

  #take(found: Uint8Array[]): void {
    while (!this.done && this.#lines.next()) {
      if (this.#records) this.#takeOfRecord(found);
      else this.#takeOfFrame(found);
    }
  }

  #takeOfFrame(found: Uint8Array[]): void {
    const { line } = this.#lines;
    let place = this.#places[this.#next];
    if (place && place.next !== null && line >= place.next) {
      this.#next += 1;
      place = this.#places[this.#next];
    }
    if (place && line >= place.line) found.push(this.#copy());
  }

  #takeOfRecord(found: Uint8Array[]): void {
    const own = this.#copy();
    this.#record.push(own);
    if (isDelimiter(own)) this.#endRecord(this.#lines.line, found);
  }

  #endRecord(last: number, found: Uint8Array[]): void {
    const place = this.#places[this.#next];
    if (place && place.line >= this.#begin && place.line <= last) {
      found.push(...this.#record);
      this.#next += 1;
    }
    this.#record = [];
    this.#begin = last + 1;
  }

  #copy(): Uint8Array {
    const { bytes, from, to } = this.#lines;
    const line = new Uint8Array(to - from + 1);
    line.set(bytes.subarray(from, to));
    line[to - from] = LF;
    return line;
  }
}

/** A line that begins with four dollar signs ends a record. */
function isDelimiter(line: Uint8Array): boolean {
  return line[0] === 36 && line[1] === 36 && line[2] === 36 && line[3] === 36;
}
