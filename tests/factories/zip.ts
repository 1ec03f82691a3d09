import { crc32, deflateRawSync } from "node:zlib";

export interface TestEntry {
  name: string;
  content: string | Uint8Array;
  /** Packed with deflate by default. */
  store?: boolean;
  flags?: number;
  /** Unix mode, such as 0o120777 for a link. */
  mode?: number;
  /** What the list says instead of the truth. */
  bytes?: number;
  crc?: number;
  /** Another place than its own. */
  offset?: number;
}

/** A zip archive as packers write it, with room for lies. */
export function zipOf(entries: readonly TestEntry[], options: { count?: number } = {}): Buffer {
  const locals: Buffer[] = [];
  const list: Buffer[] = [];
  let at = 0;
  for (const { name, content, store = false, flags = 0, mode = 0o100644, ...lies } of entries) {
    const raw = Buffer.from(content);
    const packed = store ? raw : deflateRawSync(raw);
    const path = Buffer.from(name);
    const local = Buffer.alloc(30);
    local.writeUInt32LE(0x04034b50, 0);
    local.writeUInt16LE(path.length, 26);
    const head = Buffer.alloc(46);
    head.writeUInt32LE(0x02014b50, 0);
    head.writeUInt16LE(flags, 8);
    head.writeUInt16LE(store ? 0 : 8, 10);
    head.writeUInt32LE(lies.crc ?? crc32(raw), 16);
    head.writeUInt32LE(packed.length, 20);
    head.writeUInt32LE(lies.bytes ?? raw.length, 24);
    head.writeUInt16LE(path.length, 28);
    head.writeUInt32LE((mode << 16) >>> 0, 38);
    head.writeUInt32LE(lies.offset ?? at, 42);
    locals.push(local, path, packed);
    list.push(head, path);
    at += 30 + path.length + packed.length;
  }
  const directory = Buffer.concat(list);
  const end = Buffer.alloc(22);
  end.writeUInt32LE(0x06054b50, 0);
  const count = options.count ?? entries.length;
  end.writeUInt16LE(Math.min(count, 0xffff), 8);
  end.writeUInt16LE(Math.min(count, 0xffff), 10);
  end.writeUInt32LE(directory.length, 12);
  end.writeUInt32LE(at, 16);
  return Buffer.concat([...locals, directory, end]);
}
