import { crc32, createInflateRaw, type InflateRaw } from "node:zlib";

/** gzip as RFC 1952 lays it out. */
const MAGIC = [0x1f, 0x8b] as const;
const DEFLATE = 8;
const FLAG = { headerCrc: 2, extra: 4, name: 8, comment: 16, reserved: 0xe0 };

/** Compressed bytes given to the inflater at once: at the highest ratio (1,032) it makes 16 MB of them, not more. */
const SLICE = 16_384;

/** The compressed file is damaged; nothing of it may be taken in. */
export class GzipError extends Error {
  override name = "GzipError";
}

/** True where a file begins as gzip does. */
export function looksLikeGzip(start: Uint8Array): boolean {
  return start.length >= 2 && start[0] === MAGIC[0] && start[1] === MAGIC[1];
}

/** Bytes of an iterable, taken as needed. */
class Supply {
  private readonly source: AsyncIterator<Uint8Array>;
  private rest: Uint8Array = new Uint8Array(0);

  constructor(source: AsyncIterable<Uint8Array>) {
    this.source = source[Symbol.asyncIterator]();
  }

  /** The next bytes as they come; null at the end. */
  async some(): Promise<Uint8Array | null> {
    while (this.rest.length === 0) {
      const next = await this.source.next();
      if (next.done) return null;
      this.rest = next.value;
    }
    const taken = this.rest;
    this.rest = new Uint8Array(0);
    return taken;
  }

  /** Exactly n bytes, or fewer where the source ends before. */
  async exactly(n: number): Promise<Uint8Array> {
    const taken = new Uint8Array(n);
    let filled = 0;
    while (filled < n) {
      const next = await this.some();
      if (next === null) return taken.subarray(0, filled);
      const use = Math.min(n - filled, next.length);
      taken.set(next.subarray(0, use), filled);
      filled += use;
      this.back(next.subarray(use));
    }
    return taken;
  }

  /** Gives bytes back that were taken too many. */
  back(bytes: Uint8Array): void {
    if (bytes.length === 0) return;
    this.rest = this.rest.length === 0 ? bytes : Buffer.concat([bytes, this.rest]);
  }

  async close(): Promise<void> {
    await this.source.return?.();
  }
}

const cutOff = () => new GzipError("The compressed file ends early; part of it is missing.");

async function skipText(supply: Supply): Promise<void> {
  for (;;) {
    const byte = await supply.exactly(1);
    if (byte.length === 0) throw cutOff();
    if (byte[0] === 0) return;
  }
}

/** Reads a member's header; false where what stands here is no member. */
async function readHeader(supply: Supply): Promise<boolean> {
  const header = await supply.exactly(10);
  if (!looksLikeGzip(header)) {
    supply.back(header);
    return false;
  }
  if (header.length < 10) throw cutOff();
  const flags = header[3] ?? 0;
  if (header[2] !== DEFLATE || (flags & FLAG.reserved) !== 0) {
    throw new GzipError("The file begins like gzip but is packed in a way that gzip does not know.");
  }
  if (flags & FLAG.extra) {
    const length = await supply.exactly(2);
    if (length.length < 2) throw cutOff();
    const size = (length[0] ?? 0) | ((length[1] ?? 0) << 8);
    if ((await supply.exactly(size)).length < size) throw cutOff();
  }
  if (flags & FLAG.name) await skipText(supply);
  if (flags & FLAG.comment) await skipText(supply);
  if (flags & FLAG.headerCrc && (await supply.exactly(2)).length < 2) throw cutOff();
  return true;
}

/** Gives one slice to the inflater and collects what comes out. */
function feed(inflater: InflateRaw, slice: Uint8Array, out: Uint8Array[]): Promise<void> {
  return new Promise((resolve, reject) => {
    const collect = (chunk: Uint8Array) => out.push(chunk);
    const done = (error?: Error | null) => {
      inflater.off("data", collect);
      inflater.off("error", done);
      if (error) reject(new GzipError("The compressed file is damaged.", { cause: error }));
      else resolve();
    };
    inflater.on("data", collect);
    inflater.once("error", done);
    inflater.write(slice, (error) => done(error));
  });
}

async function* readMember(supply: Supply): AsyncGenerator<Uint8Array, void, undefined> {
  const inflater = createInflateRaw({ chunkSize: 65_536 });
  let ended = false;
  inflater.once("end", () => {
    ended = true;
  });
  let sum = 0;
  let size = 0;
  try {
    while (!ended) {
      const bytes = await supply.some();
      if (bytes === null) throw cutOff();
      const slice = bytes.subarray(0, SLICE);
      const before = inflater.bytesWritten;
      const out: Uint8Array[] = [];
      await feed(inflater, slice, out);
      // "end" is told a turn after the last data.
      await new Promise((resolve) => setImmediate(resolve));
      supply.back(Buffer.from(bytes.subarray(slice.length)));
      supply.back(slice.subarray(inflater.bytesWritten - before));
      for (const chunk of out) {
        sum = crc32(chunk, sum);
        size = (size + chunk.length) >>> 0;
        yield chunk;
      }
    }
  } finally {
    inflater.destroy();
  }
  const trailer = Buffer.from(await supply.exactly(8));
  if (trailer.length < 8) throw cutOff();
  if (trailer.readUInt32LE(0) !== sum >>> 0 || trailer.readUInt32LE(4) !== size) {
    throw new GzipError(
      "The checksum of the compressed file does not fit its content: it was damaged on the way.",
    );
  }
}

/**
 * Unpacks gzip, several members in a row too, as a stream. Checksums and lengths are checked; one layer only: what comes
 * out is not unpacked again. There is no limit here, the reader of the bytes counts them and stops.
 *
 * @param onJunk called when bytes that are no member follow the last one (zero padding is not junk)
 * @throws GzipError when the file is damaged or ends early
 */
export async function* unpackGzip(
  source: AsyncIterable<Uint8Array>,
  onJunk: () => void,
): AsyncGenerator<Uint8Array, void, undefined> {
  const supply = new Supply(source);
  try {
    while (await readHeader(supply)) yield* readMember(supply);
    let junk = false;
    for (;;) {
      const rest = await supply.some();
      if (rest === null) break;
      junk ||= rest.some((byte) => byte !== 0);
    }
    if (junk) onJunk();
  } finally {
    await supply.close();
  }
}
