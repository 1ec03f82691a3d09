import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { FrameCutter, type FramePlace } from "./cut-frames.ts";

function cut(text: string, places: FramePlace[], options: { records?: boolean; piece?: number } = {}) {
  const cutter = new FrameCutter({ file: "a", records: options.records ?? false, places });
  const bytes = new TextEncoder().encode(text);
  const found: Uint8Array[] = [];
  const piece = options.piece ?? 7;
  for (let at = 0; at < bytes.length; at += piece) found.push(...cutter.push(bytes.slice(at, at + piece)));
  found.push(...cutter.end());
  return found.map((one) => new TextDecoder().decode(one)).join("");
}

const frame = (k: number) => `2\nframe ${k} E=-${k}.50\nH 0 0 ${k}\nH 0 0 ${k}.74\n`;
const xyz = [1, 2, 3, 4].map(frame).join("");

describe("FrameCutter", () => {
  it("takes frames of an XYZ as they stand", () => {
    const places = [
      { line: 5, next: 9 },
      { line: 13, next: null },
    ];
    expect(cut(xyz, places)).toBe(frame(2) + frame(4));
    expect(cut(xyz, [{ line: 1, next: 5 }])).toBe(frame(1));
    expect(
      cut(xyz, [
        { line: 5, next: 9 },
        { line: 9, next: 13 },
      ]),
    ).toBe(frame(2) + frame(3));
    expect(cut(xyz, [])).toBe("");
  });

  it("counts lines as the readers do, whatever ends them, and ends them alike", () => {
    const places = [{ line: 9, next: 13 }];
    for (const end of ["\r\n", "\r"]) expect(cut(xyz.replaceAll("\n", end), places)).toBe(frame(3));
    expect(cut(xyz.trimEnd(), [{ line: 13, next: null }])).toBe(frame(4));
  });

  it("takes whole records of an SDF by any of their lines", () => {
    const record = (k: number) => `name ${k}\n  prog\n\n  1  0 V2000\nM  END\n> <E>\n${k}\n\n$$$$\n`;
    const sdf = [1, 2, 3].map(record).join("");
    for (const line of [10, 13, 18]) {
      expect(cut(sdf, [{ line, next: null }], { records: true })).toBe(record(2));
    }
    const open = record(3).replace("$$$$\n", "");
    expect(cut(record(1) + open, [{ line: 13, next: null }], { records: true })).toBe(open);
  });

  it("finds the same whatever the pieces", () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 200 }), fc.subarray([1, 2, 3, 4]), (piece, chosen) => {
        const places = chosen.map((k) => ({ line: 4 * k - 3, next: k === 4 ? null : 4 * k + 1 }));
        expect(cut(xyz, places, { piece })).toBe(chosen.map(frame).join(""));
      }),
      { seed: 20261201 },
    );
  });
});
