import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { LineBuffer, MAX_LINE_BYTES } from "./lines.ts";

const encoder = new TextEncoder();
const decoder = new TextDecoder();

function linesOf(text: string, cuts: readonly number[] = []): string[] {
  const bytes = encoder.encode(text);
  const edges = [0, ...[...cuts].map((cut) => cut % (bytes.length + 1)).sort((a, b) => a - b), bytes.length];
  const buffer = new LineBuffer("a.xyz");
  const lines: string[] = [];
  const take = () => {
    while (buffer.next()) lines.push(decoder.decode(buffer.bytes.subarray(buffer.from, buffer.to)));
  };
  for (let k = 0; k + 1 < edges.length; k++) {
    buffer.append(bytes.subarray(edges[k], edges[k + 1]));
    take();
  }
  buffer.close();
  take();
  expect(buffer.line).toBe(lines.length);
  return lines;
}

describe("lines out of bytes", () => {
  test("end in LF, CRLF, CR or nothing", () => {
    expect(linesOf("a\nb\r\nc\rd")).toEqual(["a", "b", "c", "d"]);
    expect(linesOf("a\n")).toEqual(["a"]);
    expect(linesOf("a\r")).toEqual(["a"]);
    expect(linesOf("\r\n\n\r\r")).toEqual(["", "", "", ""]);
    expect(linesOf("")).toEqual([]);
  });

  test("do not depend on where the chunks end", () => {
    const text = fc.string({ unit: fc.constantFrom("a", " ", "\n", "\r", "\r\n", "é"), maxLength: 40 });
    fc.assert(
      fc.property(text, fc.array(fc.nat(60), { maxLength: 6 }), (written, cuts) => {
        const plain = written.replace(/\r\n|\r/g, "\n").replace(/\n$/, "");
        expect(linesOf(written, cuts)).toEqual(written === "" ? [] : plain.split("\n"));
      }),
      { seed: 21, numRuns: 500 },
    );
  });

  test("may be 1 MiB long and not a byte longer", () => {
    const longest = "x".repeat(MAX_LINE_BYTES);
    expect(linesOf(`${longest}\nb`)).toHaveLength(2);
    expect(linesOf(`a\n${longest}`)).toHaveLength(2);
    expect(() => linesOf(`a\n${longest}x\n`)).toThrow(/line 2: a line is longer than the limit of 1 MiB/);
    expect(() => linesOf(`${longest}x`)).toThrow(/1 MiB/);
  });

  test("are refused before a line without end fills the memory", () => {
    const buffer = new LineBuffer("a.xyz");
    const piece = new Uint8Array(64 * 1024).fill(120);
    const feed = () => {
      for (let k = 0; k < 1000; k++) {
        buffer.append(piece);
        buffer.next();
      }
    };
    expect(feed).toThrow(/1 MiB/);
    expect(buffer.bytes.length).toBeLessThan(4 * MAX_LINE_BYTES);
  });

  test("hold no NUL byte", () => {
    expect(() => linesOf("a\nb\0c\n")).toThrow(/line 2: this is not a text file/);
  });

  test("a megabyte that trickles in byte by byte is scanned once", () => {
    const buffer = new LineBuffer("a.xyz");
    const one = Uint8Array.of(120);
    for (let k = 0; k < 300_000; k++) {
      buffer.append(one);
      buffer.next();
    }
    buffer.close();
    expect(buffer.next()).toBe(true);
    expect(buffer.to - buffer.from).toBe(300_000);
  });
});
