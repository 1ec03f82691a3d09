import { mkdtemp, open, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import path from "node:path";
import { Readable } from "node:stream";
import { crc32, createInflateRaw } from "node:zlib";
import { IntakeRejection } from "../../lib/intake/reject.ts";
import { escapeControls } from "../../lib/text/escape.ts";

/** Entries beyond these are no upload of structures (row G11); each costs a look at its header. */
const MOST_ENTRIES = 10_000;
/** The list of entries at the archive's end is read at once. */
const MOST_DIRECTORY_BYTES = 8 * 2 ** 20;
const END_BYTES = 22;
const HEADER_BYTES = 46;
const LOCAL_BYTES = 30;
const PIECE_BYTES = 65_536;

/** One file of an archive. */
export interface ZipEntry {
  /** Without its path. */
  name: string;
  /** Why it cannot be read, as the end of a sentence; null where it can. */
  refusal: string | null;
  /** As the archive says. */
  bytes: number;
}

interface Located extends ZipEntry {
  offset: number;
  packed: number;
  method: number;
  crc: number;
}

type Handle = Awaited<ReturnType<typeof open>>;

const looksLikeZip = (head: Uint8Array) =>
  head[0] === 0x50 &&
  head[1] === 0x4b &&
  (head[2] === 3 || head[2] === 5) &&
  (head[3] === 4 || head[3] === 6);

/** Whether bytes begin as a zip archive does; of four at least. */
export function isZip(head: Uint8Array): boolean {
  return head.length >= 4 && looksLikeZip(head);
}

function broken(file: string, message: string): IntakeRejection {
  const hint = "Pack the files anew, or send them one by one.";
  return new IntakeRejection({ code: "G09", file, message, hint });
}

/**
 * A zip archive laid aside on disk while it is read, for its list of entries stands at its end. The file has no name
 * any more from its first byte on, so that nothing stays behind whatever happens.
 */
export class ZipArchive {
  private constructor(
    private readonly file: string,
    private readonly handle: Handle,
    private readonly size: number,
  ) {}

  /** @param source the archive's bytes, counted by whoever gives them */
  static async from(source: AsyncIterable<Uint8Array>, file: string): Promise<ZipArchive> {
    const folder = await mkdtemp(path.join(tmpdir(), "lowlying-"));
    const handle = await open(path.join(folder, "archive"), "wx+");
    await rm(folder, { recursive: true });
    try {
      let size = 0;
      for await (const chunk of source) {
        await handle.write(chunk, 0, chunk.length, size);
        size += chunk.length;
      }
      return new ZipArchive(file, handle, size);
    } catch (error) {
      await handle.close();
      throw error;
    }
  }

  close(): Promise<void> {
    return this.handle.close();
  }

  /**
   * The files of the archive in the order of its list; folders and what desktops add are left out.
   *
   * @throws IntakeRejection for a damaged list, too many entries, or entries that lie over one another
   */
  async entries(): Promise<Located[]> {
    const end = await this.readEnd();
    const count = end.readUInt16LE(10);
    const [bytes, offset] = [end.readUInt32LE(12), end.readUInt32LE(16)];
    if (count > MOST_ENTRIES || bytes > MOST_DIRECTORY_BYTES) {
      const found = count === 0xffff ? "more than 65,000" : count.toLocaleString("en-GB");
      throw new IntakeRejection({
        code: "G11",
        file: this.file,
        message: `The limit is ${MOST_ENTRIES.toLocaleString("en-GB")} files in an archive, and this one has ${found}.`,
        hint: "Put the structures into fewer files, many frames in each.",
      });
    }
    if (offset + bytes > this.size) throw broken(this.file, "The zip archive's list of files is damaged.");
    const entries = this.parse(await this.read(offset, bytes), count);
    this.checkPlaces(entries, offset);
    return entries.filter(({ name }) => name !== "");
  }

  private async read(offset: number, length: number): Promise<Buffer> {
    const buffer = Buffer.alloc(length);
    const { bytesRead } = await this.handle.read(buffer, 0, length, offset);
    if (bytesRead < length) throw broken(this.file, "The zip archive ends early.");
    return buffer;
  }

  private async readEnd(): Promise<Buffer> {
    const length = Math.min(this.size, END_BYTES + 65_535);
    const tail = length < END_BYTES ? Buffer.alloc(0) : await this.read(this.size - length, length);
    const at = tail.lastIndexOf(Buffer.from("PK\x05\x06", "latin1"));
    const end = at < 0 ? null : tail.subarray(at);
    if (end === null || end.length < END_BYTES) throw broken(this.file, "The zip archive ends early.");
    if (end.readUInt16LE(4) !== 0 || end.readUInt16LE(6) !== 0) {
      throw broken(this.file, "The zip archive is one of several parts.");
    }
    return end;
  }

  private parse(list: Buffer, count: number): Located[] {
    const entries: Located[] = [];
    for (let at = 0, k = 0; k < count; k++) {
      if (at + HEADER_BYTES > list.length || list.readUInt32LE(at) !== 0x02014b50) {
        throw broken(this.file, "The zip archive's list of files is damaged.");
      }
      const [nameLength, extra, comment] = [28, 30, 32].map((place) => list.readUInt16LE(at + place)) as [
        number,
        number,
        number,
      ];
      const path = list.toString("utf8", at + HEADER_BYTES, at + HEADER_BYTES + nameLength);
      const flags = list.readUInt16LE(at + 8);
      const method = list.readUInt16LE(at + 10);
      const isLink = ((list.readUInt32LE(at + 38) >>> 16) & 0o170000) === 0o120000;
      entries.push({
        name: ownName(path),
        refusal: refusalOf(flags, method, isLink),
        method,
        crc: list.readUInt32LE(at + 16),
        packed: list.readUInt32LE(at + 20),
        bytes: list.readUInt32LE(at + 24),
        offset: list.readUInt32LE(at + 42),
      });
      at += HEADER_BYTES + nameLength + extra + comment;
    }
    return entries;
  }

  /** Entries that share bytes make an archive unpack to far more than it holds. */
  private checkPlaces(entries: readonly Located[], end: number): void {
    const sorted = [...entries].sort((a, b) => a.offset - b.offset);
    for (const [k, { offset, packed }] of sorted.entries()) {
      const next = sorted[k + 1]?.offset ?? end;
      if (offset + LOCAL_BYTES + packed > next) {
        throw broken(this.file, "Files of the zip archive lie over one another, as no packer writes them.");
      }
    }
  }

  /**
   * The unpacked bytes of an entry.
   *
   * @throws IntakeRejection, from the bytes, where they are not what the list says
   */
  async *unpack(entry: ZipEntry): AsyncGenerator<Uint8Array, void, undefined> {
    const { offset, packed, method, bytes, crc } = entry as Located;
    const damaged = () => broken(this.file, `“${entry.name}” in the archive is damaged.`);
    const local = await this.read(offset, LOCAL_BYTES);
    if (local.readUInt32LE(0) !== 0x04034b50) throw damaged();
    const start = offset + LOCAL_BYTES + local.readUInt16LE(26) + local.readUInt16LE(28);
    let sum = 0;
    let found = 0;
    try {
      for await (const chunk of this.plain(start, packed, method)) {
        found += chunk.length;
        if (found > bytes) throw damaged();
        sum = crc32(chunk, sum);
        yield chunk;
      }
    } catch (error) {
      if (error instanceof IntakeRejection || !isZlibError(error)) throw error;
      throw damaged();
    }
    if (found !== bytes || sum !== crc) throw damaged();
  }

  private plain(start: number, packed: number, method: number): AsyncIterable<Uint8Array> {
    const raw = this.pieces(start, packed);
    if (method === 0) return raw;
    const source = Readable.from(raw, { objectMode: false });
    const inflate = createInflateRaw();
    source.on("error", (error) => inflate.destroy(error));
    return source.pipe(inflate);
  }

  private async *pieces(start: number, length: number): AsyncGenerator<Uint8Array, void, undefined> {
    for (let at = 0; at < length; at += PIECE_BYTES) {
      yield await this.read(start + at, Math.min(PIECE_BYTES, length - at));
    }
  }
}

const isZlibError = (error: unknown) =>
  error instanceof Error && /^Z_/.test(String(Reflect.get(error, "code") ?? ""));

/** The name without its path; empty for folders and what desktops put beside files. */
function ownName(path: string): string {
  if (/(^|[\\/])__MACOSX[\\/]/.test(path)) return "";
  const name = path.split(/[\\/]/).at(-1) ?? "";
  return name.startsWith("._") || name === ".DS_Store" || name === "Thumbs.db" ? "" : name;
}

function refusalOf(flags: number, method: number, isLink: boolean): string | null {
  if ((flags & 0x41) !== 0) return "it is encrypted. Pack it without a password.";
  if (isLink) return "it is a link. Pack the file itself.";
  if (method !== 0 && method !== 8)
    return "it is packed by a method that is not read. Pack it with “deflate”.";
  return null;
}

/** The unpacked bytes of one file of an archive, by its name as intake showed it. */
export async function* unpackEntry(
  source: AsyncIterable<Uint8Array>,
  file: string,
  entry: string,
): AsyncGenerator<Uint8Array, void, undefined> {
  const archive = await ZipArchive.from(source, file);
  try {
    const found = (await archive.entries()).find(({ name }) => shownName(name) === entry);
    if (found === undefined) throw broken(file, `The archive has no file “${entry}”.`);
    yield* archive.unpack(found);
  } finally {
    await archive.close();
  }
}

/** The name of an entry as messages and pages show it. */
export function shownName(name: string): string {
  return [...escapeControls(name)].slice(0, 255).join("");
}
