import { IntakeRejection } from "../intake/reject.ts";

/** Longest line in bytes of UTF-8, without its end (row G11). */
export const MAX_LINE_BYTES = 1024 * 1024;
/** Larger pieces are cut before they are copied in, so that the buffer stays small whatever the chunks. */
export const PIECE_BYTES = 128 * 1024;

/** Bytes behind the end that may be read. */
const MARGIN = 4;

const LF = 10;
const CR = 13;

/**
 * Lines out of a stream of bytes: LF, CRLF, lone CR and any mix, with or without an end after the last. Holds one
 * piece and the unfinished line, no more. Public fields are read by the fast path of the readers, which may move
 * `at` and `line` on by whole lines.
 *
 * @example
 * const lines = new LineBuffer("a.xyz");
 * lines.append(bytes);
 * while (lines.next()) use(lines.bytes, lines.from, lines.to, lines.line);
 */
export class LineBuffer {
  /** Always one zero byte behind `end`, and four in all: scans stop there without a bounds check. */
  bytes: Uint8Array = new Uint8Array(2 * PIECE_BYTES);
  view = new DataView(this.bytes.buffer);
  /** Start of what is not taken yet, and its end. */
  at = 0;
  end = 0;
  /** Bytes of the line last taken. */
  from = 0;
  to = 0;
  /** Number of the line last taken, from 1. */
  line = 0;
  /** True while the line at `at` is known to have no end yet. */
  unfinished = false;
  /** True once the last line was taken and had no end. */
  open = false;

  readonly #file: string;
  #scanned = 0;
  #closed = false;

  constructor(file: string) {
    this.#file = file;
  }

  /** Adds a piece; everything complete should have been taken before. */
  append(piece: Uint8Array): void {
    const kept = this.end - this.at;
    const need = kept + piece.length + MARGIN;
    if (this.end + piece.length + MARGIN > this.bytes.length) this.#makeRoom(kept, need);
    this.bytes.set(piece, this.end);
    this.end += piece.length;
    this.bytes[this.end] = 0;
  }

  /** No more bytes come: what is left is the last line. */
  close(): void {
    this.#closed = true;
  }

  /**
   * Takes the next complete line: sets `from`, `to` and `line`.
   *
   * @returns false where more bytes are needed, or at the end
   * @throws IntakeRejection on a NUL byte (G04) and on a line over 1 MiB (G11)
   */
  next(): boolean {
    const { bytes, end } = this;
    let k = this.unfinished ? this.#scanned : this.at;
    while (k < end) {
      const c = bytes[k]!;
      if (c <= CR) {
        if (c === LF || (c === CR && (k + 1 < end || this.#closed))) {
          this.#take(k, c === CR && k + 1 < end && bytes[k + 1] === LF ? k + 2 : k + 1);
          return true;
        }
        if (c === CR) break;
        if (c === 0) this.#refuseNul();
      }
      k += 1;
    }
    this.#scanned = k;
    this.unfinished = true;
    this.#checkLength(k);
    if (!this.#closed || this.at >= end) return false;
    this.#take(end, end);
    this.open = true;
    return true;
  }

  #take(to: number, next: number): void {
    this.#checkLength(to);
    this.from = this.at;
    this.to = to;
    this.at = next;
    this.line += 1;
    this.unfinished = false;
  }

  #checkLength(to: number): void {
    if (to - this.at <= MAX_LINE_BYTES) return;
    throw new IntakeRejection({
      code: "G11",
      file: this.#file,
      line: this.line + 1,
      message: `A line is longer than the limit of 1 MiB (${MAX_LINE_BYTES.toLocaleString("en-GB")} bytes).`,
      hint: "XYZ and SDF have a short line per atom: is this the right file?",
    });
  }

  #refuseNul(): never {
    throw new IntakeRejection({
      code: "G04",
      file: this.#file,
      line: this.line + 1,
      message: "This is not a text file: it holds a NUL byte.",
      hint: "Export the structures as XYZ or SDF, plain or gzip.",
    });
  }

  #makeRoom(kept: number, need: number): void {
    const shift = this.at;
    if (need <= this.bytes.length) this.bytes.copyWithin(0, this.at, this.end);
    else {
      const larger = new Uint8Array(2 * need);
      larger.set(this.bytes.subarray(this.at, this.end));
      this.bytes = larger;
      this.view = new DataView(larger.buffer);
    }
    this.#scanned -= shift;
    this.at = 0;
    this.end = kept;
  }
}
