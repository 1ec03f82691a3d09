import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { bareDecimal } from "./bare-decimal.ts";
import { scanComment } from "./comment-numbers.ts";
import { EnergyScan } from "./energies.ts";
import { decimalsOf } from "./energy-column.ts";
import { boundUnit, classify, saysRelative } from "./energy-words.ts";

const lines = fc.oneof(
  fc
    .tuple(fc.constantFrom("", " ", "    "), fc.double({ noNaN: true }), fc.integer({ min: 0, max: 12 }))
    .map(([blank, value, digits]) => `${blank}${value.toFixed(digits)}${blank}`),
  fc.stringMatching(/^ {0,2}[-+]?[0-9.]{0,20}[ ]?$/),
  fc.stringMatching(/^[-0-9.eE+= a]{0,12}$/),
);

describe("a decimal that stands alone", () => {
  it("is what the reader of words makes of it", () => {
    fc.assert(
      fc.property(lines, (comment) => {
        const bare = bareDecimal(comment);
        if (!bare) return;
        const scanned = scanComment(comment);
        expect(scanned.keyed.size).toBe(0);
        expect(scanned.numbers.length).toBe(1);
        const number = scanned.numbers[0]!;
        expect([number.text, number.value, number.position]).toEqual([bare.text, bare.value, 1]);
        expect(decimalsOf(number.text)).toBe(bare.decimals);
        expect([classify(number), boundUnit(number, scanned), saysRelative(number)]).toEqual([
          "loose",
          null,
          false,
        ]);
      }),
      { seed: 20320, numRuns: 3000 },
    );
  });

  it.each([
    ["-83.4944880275", -83.4944880275],
    ["        -83.4944880275", -83.4944880275],
    ["0.0", 0],
    ["12.5   ", 12.5],
  ])("reads %j", (comment, value) => {
    expect(bareDecimal(comment)?.value).toBe(value);
  });

  it.each([
    "",
    " ",
    "-",
    ".",
    "1",
    "-1",
    "1.",
    ".5",
    "+1.5",
    "1.5.2",
    "1.5e3",
    "1,5",
    "E 1.5",
    "1.5 2.5",
    "--1.5",
    "\t1.5",
  ])("leaves %j to the reader of words", (comment) => {
    expect(bareDecimal(comment)).toBeNull();
  });

  it("gives the findings that the same numbers give in another form", () => {
    const findings = (write: (value: number) => string) => {
      const scan = new EnergyScan();
      for (let k = 0; k < 5; k++) {
        scan.add({ number: k + 1, file: "a.xyz", line: 1 + 5 * k }, k === 3 ? "" : write(k - 1.25));
      }
      return scan.finish();
    };
    // A tab goes the long way.
    const long = findings((value) => `${value.toFixed(3)}\t`);
    expect(findings((value) => value.toFixed(3))).toEqual(long);
  });
});
