import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { decimalQuotient, parseNumber, parseQuantity, plainBlanksAndMinus, readNumber } from "./numbers.ts";

const digits = (most: number) => fc.string({ unit: fc.constantFrom(..."0123456789"), maxLength: most });
const decimal = fc
  .tuple(
    fc.constantFrom("", "+", "-"),
    digits(12),
    fc.boolean(),
    digits(20),
    fc.integer({ min: -330, max: 330 }),
  )
  .filter(([, whole, , fraction]) => whole.length + fraction.length > 0)
  .chain(([sign, whole, point, fraction, exponent]) => {
    const mantissa = point || fraction !== "" ? `${sign}${whole}.${fraction}` : `${sign}${whole}`;
    return fc.constantFrom(mantissa, `${mantissa}e${exponent}`, `${mantissa}D${exponent}`);
  });

describe("a whole token or no number", () => {
  test("is what Number makes of it, for any decimal text", () => {
    fc.assert(
      fc.property(decimal, (text) => {
        const value = Number(text.replace("D", "e"));
        expect(parseNumber(text)).toBe(Number.isFinite(value) ? value : null);
        expect(parseQuantity(text)).toBe(Math.abs(value) <= 1e50 ? value : null);
      }),
      { seed: 11, numRuns: 3000 },
    );
  });

  test.each([
    "",
    ".",
    "+",
    "-",
    "1,234",
    "5x",
    "1.2.3",
    "0x10",
    "nan",
    "inf",
    "Infinity",
    "1e",
    "1e+",
    "e5",
    " 1",
    "1 ",
    "--1",
    "1_0",
    "1e999",
    "*****",
    "١",
  ])("refuses %j", (token) => {
    expect(parseNumber(token)).toBeNull();
  });

  test.each([
    ["1.", 1],
    [".5", 0.5],
    ["+3", 3],
    ["-0.0", -0],
    ["1d3", 1000],
    ["1.5E-3", 0.0015],
  ])("reads %j", (token, value) => {
    expect(parseNumber(token)).toBe(value);
  });
});

describe("digits beyond one exact double", () => {
  test("are rounded as Number rounds them, or left open", () => {
    const parts = fc.tuple(
      fc.integer({ min: 0, max: 999_999_999 }),
      fc.integer({ min: 1, max: 9 }),
      fc.integer({ min: 0, max: 999_999_999 }),
      fc.integer({ min: 0, max: 18 }),
    );
    fc.assert(
      fc.property(parts, ([high, lowDigits, lowRaw, decimals]) => {
        const low = lowRaw % 10 ** lowDigits;
        const value = decimalQuotient(high, low, lowDigits, decimals);
        const exact = Number(`${high}${String(low).padStart(lowDigits, "0")}e-${decimals}`);
        expect(Number.isNaN(value) ? exact : value).toBe(exact);
      }),
      { seed: 12, numRuns: 5000 },
    );
  });

  test("seldom stay open", () => {
    const open = fc
      .sample(fc.tuple(fc.integer({ min: 1e8, max: 999_999_999 }), fc.integer({ min: 0, max: 99_999_999 })), {
        seed: 13,
        numRuns: 2000,
      })
      .filter(([high, low]) => Number.isNaN(decimalQuotient(high, low, 8, 16)));
    expect(open.length).toBeLessThan(10);
  });
});

describe("what is wrong with a coordinate", () => {
  test.each([
    ["1,234", "decimal-comma"],
    ["-0,5", "decimal-comma"],
    ["1.234,5", "decimal-comma"],
    ["0,1,", "decimal-comma"],
    ["-10.12345-11.33", "run-together"],
    ["10.1234511.33456", "run-together"],
    ["1.0-100", "lost-exponent"],
    ["1.0+100", "lost-exponent"],
    ["nan", "not-finite"],
    ["-inf", "not-finite"],
    ["*****", "not-finite"],
    ["1e999", "not-finite"],
    ["١.5", "foreign-digit"],
    ["5x", "not-a-number"],
    ["abc", "not-a-number"],
    ["1,2,3", "not-a-number"],
  ])("%j is %s", (token, fault) => {
    expect(readNumber(token).fault).toBe(fault);
  });

  test("an exponent written *^ is read and told", () => {
    expect(readNumber("1.2*^-6")).toEqual({ value: 1.2e-6, caret: true, fault: null });
    expect(readNumber("1.2*^").fault).toBe("not-a-number");
  });
});

test("typographic minus and blanks become ASCII, one for one", () => {
  expect(plainBlanksAndMinus("\u22121.5\u00a02\u202f3\u20094")).toBe("-1.5 2 3 4");
});
