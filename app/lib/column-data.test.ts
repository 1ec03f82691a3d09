import fc from "fast-check";
import { expect, it } from "vitest";
import { packColumn, packedFrames, unpackColumn, unpackPresence } from "./column-data.ts";

it("gives back every double bit for bit, and what is absent as absent", () => {
  const cell = fc.option(fc.double({ noNaN: true, noDefaultInfinity: true }), { nil: null });
  fc.assert(
    fc.property(fc.array(cell, { maxLength: 40 }), (cells) => {
      const values = Float64Array.from(cells, (value) => value ?? 0);
      const present = Uint8Array.from(cells, (value) => (value === null ? 0 : 1));
      const packed = packColumn({ values, present });
      const read = unpackColumn(packed, cells.length);
      expect([...read.present]).toEqual([...present]);
      // -0 is kept as 0 on purpose.
      expect([...read.values]).toEqual([...values].map((value) => value + 0));
      expect([...unpackPresence(packed.subarray(8 * cells.length), cells.length)]).toEqual([...present]);
    }),
    { seed: 20261201 },
  );
});

it("says of every length how many frames it speaks of", () => {
  for (let n = 0; n <= 1_000; n++) {
    expect(packedFrames(packColumn({ values: new Float64Array(n), present: new Uint8Array(n) }))).toBe(n);
  }
});

it("refuses what is no number, and bytes of another length", () => {
  expect(() => packColumn({ values: Float64Array.of(Number.NaN), present: Uint8Array.of(1) })).toThrow(
    /frame 1/,
  );
  expect(() => packColumn({ values: Float64Array.of(1, 2), present: Uint8Array.of(1) })).toThrow(RangeError);
  expect(() => unpackColumn(new Uint8Array(8), 1)).toThrow(RangeError);
});
