const utf8 = new TextDecoder("utf-8", { fatal: true, ignoreBOM: true });

/**
 * Windows-1252 from 0x80 to 0x9f by the WHATWG encoding standard; the rest is Latin-1. Our own table, as the engine's
 * decoder of that name is Latin-1 throughout in some versions of Node.js.
 */
const UPPER_CONTROLS =
  "\u20ac\u0081\u201a\u0192\u201e\u2026\u2020\u2021\u02c6\u2030\u0160\u2039\u0152\u008d\u017d\u008f" +
  "\u0090\u2018\u2019\u201c\u201d\u2022\u2013\u2014\u02dc\u2122\u0161\u203a\u0153\u009d\u017e\u0178";

function decodeWindows1252(bytes: Uint8Array): string {
  let text = "";
  for (const byte of bytes) {
    text += byte >= 0x80 && byte <= 0x9f ? UPPER_CONTROLS[byte - 0x80] : String.fromCharCode(byte);
  }
  return text;
}

/** Up to here plain ASCII is turned into text without the decoder, which costs more than the text. */
const SHORT = 512;

function isAscii(bytes: Uint8Array): boolean {
  for (let k = 0; k < bytes.length; k++) if (bytes[k]! > 127) return false;
  return true;
}

/** A line's text; `legacy` is true where its bytes are not UTF-8 and were read as Windows-1252 (row G03). */
export interface DecodedText {
  text: string;
  legacy: boolean;
}

/** Text of the bytes from `start` up to, not including, `end`. Each line decides for itself, so that chunks do not matter. */
export function decodeText(bytes: Uint8Array, start: number, end: number): DecodedText {
  const piece = bytes.subarray(start, end);
  if (piece.length <= SHORT && isAscii(piece)) {
    return { text: String.fromCharCode.apply(null, piece as unknown as number[]), legacy: false };
  }
  try {
    return { text: utf8.decode(piece), legacy: false };
  } catch {
    return { text: decodeWindows1252(piece), legacy: true };
  }
}

type Encoding = "utf-8" | "utf-16le" | "utf-16be";

/**
 * Turns a stream of file bytes into UTF-8 without byte order mark: UTF-16 with mark is decoded, anything else passes
 * through untouched (row G02). Push pieces, then `end()`.
 *
 * @example new Utf8Stream().push(Uint8Array.of(0xef, 0xbb, 0xbf, 0x31)) // [0x31]
 */
export class Utf8Stream {
  #head = new Uint8Array(0);
  #encoding: Encoding | null = null;
  #decoder: TextDecoder | null = null;
  readonly #encoder = new TextEncoder();

  push(chunk: Uint8Array): Uint8Array {
    if (this.#encoding === null) return this.#begin(chunk, false);
    return this.#pass(chunk);
  }

  /** What was kept back: a mark that never came, half a character. */
  end(): Uint8Array {
    const kept = this.#encoding === null ? this.#begin(new Uint8Array(0), true) : new Uint8Array(0);
    const tail = this.#decoder === null ? kept : join(kept, this.#encoder.encode(this.#decoder.decode()));
    return tail;
  }

  #begin(chunk: Uint8Array, last: boolean): Uint8Array {
    const head = join(this.#head, chunk);
    if (head.length < 3 && !last) {
      this.#head = head;
      return new Uint8Array(0);
    }
    this.#encoding = encodingByMark(head);
    if (this.#encoding !== "utf-8") {
      this.#decoder = new TextDecoder(this.#encoding);
      return this.#pass(head);
    }
    return head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf ? head.subarray(3) : head;
  }

  #pass(chunk: Uint8Array): Uint8Array {
    if (this.#decoder === null) return chunk;
    return this.#encoder.encode(this.#decoder.decode(chunk, { stream: true }));
  }
}

/** The encoding that the first bytes announce; UTF-8 without a mark of UTF-16. */
export function encodingByMark(bytes: Uint8Array): Encoding {
  if (bytes[0] === 0xff && bytes[1] === 0xfe) return "utf-16le";
  if (bytes[0] === 0xfe && bytes[1] === 0xff) return "utf-16be";
  return "utf-8";
}

function join(a: Uint8Array, b: Uint8Array): Uint8Array<ArrayBuffer> {
  const joined = new Uint8Array(a.length + b.length);
  joined.set(a);
  joined.set(b, a.length);
  return joined;
}
