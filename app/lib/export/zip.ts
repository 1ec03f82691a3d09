/**
 * A zip archive (APPNOTE 6.3.10 of PKWARE, without zip64), piece by piece. Every entry carries the same moment, so that the
 * same files give the same bytes.
 */

/** One file. `deflated` is its raw deflate stream where the caller packed it; without it the entry is stored as it is. */
export interface ZipEntry {
  /** With forward slashes, relative, no "..". */
  name: string;
  data: Uint8Array;
  deflated?: Uint8Array;
}

const LOCAL = 0x04034b50;
const CENTRAL = 0x02014b50;
const END = 0x06054b50;
/** Names are UTF-8. */
const FLAGS = 0x0800;
/** 1980-01-01 00:00, the first moment that the format knows. */
const DATE = 0x21;
const MOST_BYTES = 0xffffffff;
const MOST_ENTRIES = 0xffff;

const TABLE = Uint32Array.from({ length: 256 }, (_, n) => {
  let c = n;
  for (let k = 0; k < 8; k++) c = c & 1 ? 0xedb88320 ^ (c >>> 1) : c >>> 1;
  return c;
});

/**
 * CRC-32 (IEEE 802.3, as in zip and gzip).
 *
 * @example crc32(new TextEncoder().encode("123456789")) // 0xcbf43926
 */
export function crc32(data: Uint8Array): number {
  let crc = 0xffffffff;
  for (let k = 0; k < data.length; k++) crc = TABLE[(crc ^ data[k]!) & 0xff]! ^ (crc >>> 8);
  return (crc ^ 0xffffffff) >>> 0;
}

interface Written {
  name: Uint8Array;
  crc: number;
  method: number;
  packed: number;
  size: number;
  offset: number;
}

/**
 * Writes an archive.
 *
 * @throws RangeError on an unsafe or repeated name, and on more than the format holds without zip64 (4 GB, 65,535 files)
 * @example Buffer.concat([...writeZip([{ name: "a.txt", data: bytes }])])
 */
export function* writeZip(entries: Iterable<ZipEntry>): Generator<Uint8Array> {
  const written: Written[] = [];
  const names = new Set<string>();
  let offset = 0;
  for (const { name, data, deflated } of entries) {
    checkName(name, names);
    const body = deflated !== undefined && deflated.length < data.length ? deflated : data;
    const entry: Written = {
      name: new TextEncoder().encode(name),
      crc: crc32(data),
      method: body === data ? 0 : 8,
      packed: body.length,
      size: data.length,
      offset,
    };
    const head = localHeader(entry);
    offset += head.length + body.length;
    if (offset > MOST_BYTES || written.length >= MOST_ENTRIES) {
      throw new RangeError("More than a zip archive holds: 4 GB or 65,535 files.");
    }
    written.push(entry);
    yield head;
    yield body;
  }
  const start = offset;
  for (const entry of written) {
    const head = centralHeader(entry);
    offset += head.length;
    yield head;
  }
  yield endRecord(written.length, offset - start, start);
}

function checkName(name: string, names: Set<string>): void {
  const parts = name.split("/");
  if (name.length > 200 || parts.some((part) => part === "" || part === "." || part === "..")) {
    throw new RangeError(`“${name}” is no name for a file in an archive.`);
  }
  if (/[\\:\p{Cc}]/u.test(name))
    throw new RangeError(`“${name}” holds characters that no file name may have.`);
  if (names.has(name)) throw new RangeError(`“${name}” stands in the archive twice.`);
  names.add(name);
}

function record(bytes: number, tail: readonly Uint8Array[] = []): { view: DataView; all: Uint8Array } {
  const length = tail.reduce((sum, part) => sum + part.length, bytes);
  const all = new Uint8Array(length);
  let at = bytes;
  for (const part of tail) {
    all.set(part, at);
    at += part.length;
  }
  return { view: new DataView(all.buffer), all };
}

/** Fields that both headers share, from "version needed" on. */
function common(view: DataView, at: number, { crc, method, packed, size, name }: Written): void {
  view.setUint16(at, 20, true);
  view.setUint16(at + 2, FLAGS, true);
  view.setUint16(at + 4, method, true);
  view.setUint16(at + 6, 0, true);
  view.setUint16(at + 8, DATE, true);
  view.setUint32(at + 10, crc, true);
  view.setUint32(at + 14, packed, true);
  view.setUint32(at + 18, size, true);
  view.setUint16(at + 22, name.length, true);
}

function localHeader(entry: Written): Uint8Array {
  const { view, all } = record(30, [entry.name]);
  view.setUint32(0, LOCAL, true);
  common(view, 4, entry);
  return all;
}

function centralHeader(entry: Written): Uint8Array {
  const { view, all } = record(46, [entry.name]);
  view.setUint32(0, CENTRAL, true);
  view.setUint16(4, 20, true);
  common(view, 6, entry);
  view.setUint32(42, entry.offset, true);
  return all;
}

function endRecord(entries: number, size: number, offset: number): Uint8Array {
  const { view, all } = record(22);
  view.setUint32(0, END, true);
  view.setUint16(8, entries, true);
  view.setUint16(10, entries, true);
  view.setUint32(12, size, true);
  view.setUint32(16, offset, true);
  return all;
}
