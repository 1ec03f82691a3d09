import { randomBytes } from "node:crypto";
import { gzipSync } from "node:zlib";
import { describe, expect, it } from "vitest";
import { GzipError, unpackGzip } from "./unpack-gzip.server.ts";

async function* pieces(bytes: Uint8Array, size: number) {
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, at + size);
}

async function unpack(bytes: Uint8Array, size = 1_000) {
  let junk = false;
  const out: Uint8Array[] = [];
  for await (const chunk of unpackGzip(pieces(bytes, size), () => {
    junk = true;
  })) {
    out.push(Buffer.from(chunk));
  }
  return { bytes: Buffer.concat(out), junk };
}

const text = Buffer.from("12\ncomment\n".repeat(1_000));
const noise = randomBytes(20_000);

describe("gzip, as RFC 1952 lays it out", () => {
  it.each([1, 7, 1_000, 70_000, 1e6])("gives the same bytes in pieces of %i", async (size) => {
    const packed = Buffer.concat([gzipSync(text), gzipSync(noise), gzipSync(Buffer.alloc(0))]);
    const whole = Buffer.concat([text, noise]);
    const found = await unpack(packed, size);
    expect(found.bytes.equals(whole)).toBe(true);
    expect(found.junk).toBe(false);
  });

  it("skips name, comment, extra field and header checksum", async () => {
    const plain = gzipSync(text);
    const header = Buffer.from(plain.subarray(0, 10));
    header[3] = 2 + 4 + 8 + 16;
    const extras = Buffer.from([3, 0, 1, 2, 3, ...Buffer.from("a.xyz\0"), ...Buffer.from("words\0"), 9, 9]);
    const packed = Buffer.concat([header, extras, plain.subarray(10)]);
    expect((await unpack(packed, 3)).bytes.equals(text)).toBe(true);
  });

  it("remarks on junk after the last member, and not on zero padding", async () => {
    const packed = gzipSync(text);
    const junk = await unpack(Buffer.concat([packed, Buffer.from("left over")]));
    expect(junk.junk).toBe(true);
    expect(junk.bytes.equals(text)).toBe(true);
    expect((await unpack(Buffer.concat([packed, Buffer.alloc(512)]))).junk).toBe(false);
  });

  it("refuses a file that ends early, wherever it is cut", async () => {
    const packed = gzipSync(text);
    for (const cut of [3, 9, 10, 20, packed.length - 9, packed.length - 8, packed.length - 1]) {
      await expect(unpack(packed.subarray(0, cut))).rejects.toThrow(GzipError);
    }
  });

  it("refuses a wrong checksum and damaged content", async () => {
    const wrong = gzipSync(text);
    wrong[wrong.length - 6] = (wrong[wrong.length - 6] ?? 0) ^ 1;
    await expect(unpack(wrong)).rejects.toThrow(/checksum/);
    const damaged = gzipSync(noise);
    damaged.fill(255, 20, 60);
    await expect(unpack(damaged)).rejects.toThrow(GzipError);
  });

  it("stops when its reader stops, long before a bomb has unpacked", async () => {
    const bomb = gzipSync(Buffer.alloc(200e6));
    let seen = 0;
    for await (const chunk of unpackGzip(pieces(bomb, 65_536), () => {})) {
      seen += chunk.length;
      if (seen > 1e6) break;
    }
    expect(seen).toBeLessThan(40e6);
  });
});
