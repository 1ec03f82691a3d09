import { DomainError } from "../../lib/errors.ts";
import { formatBytes } from "../../lib/format.ts";
import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { GzipError, looksLikeGzip, unpackGzip } from "./unpack-gzip.server.ts";

/** The bytes of a file as its reader takes them, whatever it was packed in. */
export interface OpenedFile {
  bytes: AsyncGenerator<Uint8Array, void, undefined>;
  packed: boolean;
  /** Its first bytes as they came, four at least where it has so many. */
  head: Uint8Array;
}

/** Refused as a whole, since one more byte would pass the limit (413). */
export function tooManyBytes(file: string, limit: number): DomainError {
  const message = `${file} is larger than the limit of ${formatBytes(limit)} (unpacked). Narrow the energy window or split the file.`;
  return new DomainError("too-large", "The file is too large", message, { faults: [{ file, message }] });
}

async function* countBytes(
  source: AsyncIterable<Uint8Array>,
  file: string,
  limit: number,
): AsyncGenerator<Uint8Array, void, undefined> {
  let bytes = 0;
  for await (const chunk of source) {
    bytes += chunk.length;
    if (bytes > limit) throw tooManyBytes(file, limit);
    yield chunk;
  }
}

async function* unpacked(
  source: AsyncIterable<Uint8Array>,
  file: string,
  remark: (message: IntakeMessage) => void,
): AsyncGenerator<Uint8Array, void, undefined> {
  const onJunk = () =>
    remark({
      code: "G07",
      severity: "remark",
      file,
      message: "Bytes that are no gzip follow the compressed file; they are left out.",
    });
  let first = true;
  try {
    for await (const chunk of unpackGzip(source, onJunk)) {
      if (first && looksLikeGzip(chunk)) {
        throw new IntakeRejection({
          code: "G09",
          file,
          message: "The file is packed twice: inside of the gzip file lies another one.",
          hint: "Unpack it once and send it again.",
        });
      }
      first = false;
      yield chunk;
    }
  } catch (error) {
    if (!(error instanceof GzipError)) throw error;
    throw new IntakeRejection({
      code: "G07",
      file,
      message: error.message,
      hint: "Nothing was taken in. Copy the file again and send it once more.",
    });
  }
}

/** The bytes for a reader that may leave early without closing them. */
export function keptOpen(bytes: AsyncGenerator<Uint8Array>): AsyncIterable<Uint8Array> {
  return { [Symbol.asyncIterator]: () => ({ next: () => bytes.next() }) };
}

/**
 * What a packed file comes to that its reader refused: the rest is unpacked and counted, nothing more, so that a small
 * file that unpacks beyond the limit is told so whatever lies in it. At the limit of 512 MB that is half a second.
 *
 * @returns the refusal to give: the reader's own, or that the file is too large
 */
export async function refusalOfPacked(refusal: unknown, bytes: AsyncGenerator<Uint8Array>): Promise<unknown> {
  try {
    while (!(await bytes.next()).done);
  } catch (error) {
    if (error instanceof DomainError && error.code === "too-large") return error;
  }
  return refusal;
}

/**
 * Opens a file by what it begins with: gzip is unpacked, one layer, anything else passes. Counts what comes out and
 * stops as soon as the limit is passed, whatever the ratio of packing.
 *
 * @param source original bytes; at least the first piece is read before this returns
 * @throws IntakeRejection (G07, G09) and DomainError too-large, from the bytes as they are read
 */
export async function openFile(
  source: AsyncIterable<Uint8Array>,
  options: { file: string; limit: number; remark(message: IntakeMessage): void },
): Promise<OpenedFile> {
  const iterator = source[Symbol.asyncIterator]();
  let head: Uint8Array = new Uint8Array(0);
  while (head.length < 4) {
    const next = await iterator.next();
    if (next.done) break;
    head = head.length === 0 ? next.value : Buffer.concat([head, next.value]);
  }
  const whole = async function* () {
    try {
      if (head.length > 0) yield head;
      for (let next = await iterator.next(); !next.done; next = await iterator.next()) yield next.value;
    } finally {
      await iterator.return?.();
    }
  };
  const packed = looksLikeGzip(head);
  const plain = packed ? unpacked(whole(), options.file, options.remark) : whole();
  return { bytes: countBytes(plain, options.file, options.limit), packed, head };
}
