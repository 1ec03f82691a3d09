import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { agreementCsv, besideCsv } from "./measured-csv.ts";
import {
  besideProperties,
  measuredPropertiesRecord,
  readMeasuredProperties,
  readPastedProperties,
  writeMeasuredProperties,
} from "./measured-properties.ts";
import { unreadWords } from "./pasted.ts";
import { asTyped } from "./words.ts";

const figure = (name: string, unit: string | null, average: number | null, rule = "linear") => ({
  ...{ name, unit, rule, average },
  error: 0.1,
});

describe("measured values of properties in an address", () => {
  it("come back as they were written, whatever the names", () => {
    const name = fc.string({ minLength: 1, maxLength: 20 });
    const value = fc.double({ min: -999_999, max: 999_999, noNaN: true });
    fc.assert(
      fc.property(fc.uniqueArray(fc.tuple(name, value), { selector: ([key]) => key }), (pairs) => {
        // An address is text: -0 is 0 there.
        const values = new Map(pairs.map(([key, number]) => [key, number + 0]));
        const text = writeMeasuredProperties(values);
        expect(readMeasuredProperties(text)).toEqual(
          new Map([...values].filter(([, number]) => Math.abs(number) >= 1e-99 || number === 0)),
        );
        expect(measuredPropertiesRecord(values).values.map(([key]) => key)).toEqual(
          [...values.keys()].sort(),
        );
      }),
      { seed: 20261202, numRuns: 200 },
    );
  });

  it("drops what is no number, too large or without a name", () => {
    expect(readMeasuredProperties("3J~7.2~dipole~one~~4~x~1e7~y~NaN~z")).toEqual(new Map([["3J", 7.2]]));
    expect(readMeasuredProperties("")).toEqual(new Map());
  });
});

describe("a pasted list", () => {
  const names = ["3J H4-H5", "dipole", "Dipole 2", "r"];

  it("is a name and a value a line, spaces and letter case aside", () => {
    const { values, unread } = readPastedProperties(
      "3J H4-H5 7.20\r\n\nDIPOLE;1.85\nDipole 2 = \u22120.5\nr:\t1e1",
      names,
    );
    expect(values).toEqual(
      new Map([
        ["3J H4-H5", 7.2],
        ["dipole", 1.85],
        ["Dipole 2", -0.5],
        ["r", 10],
      ]),
    );
    expect(unread).toEqual([]);
  });

  it("gives back the lines that name nothing, have no value, a decimal comma or more than one meaning", () => {
    const text = "dipol 1\n3J H4-H5\nr 1,5\nr\nR 2";
    const read = readPastedProperties(text, names);
    expect(read).toEqual({
      values: new Map([["r", 2]]),
      unread: [
        { line: "dipol 1", why: "name" },
        { line: "3J H4-H5", why: "number" },
        { line: "r 1,5", why: "comma" },
        { line: "r", why: "number" },
      ],
    });
    expect(unreadWords(read.unread, "property")).toBe(
      "A comma in the number: r 1,5. No such property in the table: dipol 1. No property and number: 3J H4-H5; r.",
    );
    expect(readPastedProperties("r 1,5", names, true).values).toEqual(new Map([["r", 1.5]]));
    expect(readPastedProperties("r 1,234,5", names, true).unread).toEqual([
      { line: "r 1,234,5", why: "number" },
    ]);
    expect(readPastedProperties("A 1", ["a", "A "]).values).toEqual(new Map([["a", 1]]));
    expect(readPastedProperties("ab 1", ["AB", "Ab"]).unread).toEqual([{ line: "ab 1", why: "name" }]);
  });
});

describe("averages of properties beside measured values", () => {
  it("are judged together by unit, and numbers without a unit are not", () => {
    const { rows, units } = besideProperties(
      [
        figure("J1", "Hz", 7),
        figure("J2", "Hz", 3.5),
        figure("J3", "Hz", null),
        figure("r", "Å", 2.5, "r-6"),
        figure("k", null, 1),
        figure("unmeasured", "Hz", 9),
      ],
      new Map([
        ["J1", 7.4],
        ["J2", 3],
        ["J3", 1],
        ["r", 2.5],
        ["k", 4],
        ["elsewhere", 3],
      ]),
    );
    expect(rows.map(({ difference }) => difference)).toEqual([
      expect.closeTo(-0.4, 12),
      0.5,
      null,
      0,
      -3,
      null,
    ]);
    expect(units.map(({ unit, farthest }) => [unit, farthest])).toEqual([
      ["Hz", "J2"],
      ["Å", "r"],
    ]);
    expect(units[0]!.agreement).toMatchObject({ n: 2, corrected: null });
    expect(units[0]!.agreement.mad).toBeCloseTo(0.45, 12);
    expect(units[0]!.agreement.rmsd).toBeCloseTo(Math.sqrt((0.16 + 0.25) / 2), 12);
    expect(units[0]!.agreement.max).toBeCloseTo(0.5, 12);
  });

  it("go the short way round where they are angles, and then have no line against the measured ones", () => {
    const angles = [-179, 60, 58, 61, -60].map((value, k) => figure(`t${k}`, "°", value, "circular"));
    const values = new Map([179, 62, 58, 59, -61].map((value, k) => [`t${k}`, value]));
    const { rows, units } = besideProperties(angles, values);
    expect(rows.map(({ difference }) => difference)).toEqual([2, -2, 0, 2, 1]);
    expect(units[0]!.agreement).toMatchObject({ n: 5, mad: 1.4, max: 2, corrected: null });
    const radians = besideProperties(
      [{ ...figure("t", "rad", 3.1, "circular") }],
      new Map([["t", -3.1]]),
    ).rows;
    expect(radians[0]!.difference).toBeCloseTo(6.2 - 2 * Math.PI, 12);
  });

  it("leave as files with their facts, escaped, one row a property and one a unit", () => {
    const { rows, units } = besideProperties([figure("=J,1", "Hz", 7)], new Map([["=J,1", 7.5]]));
    expect(besideCsv([], null, { rows, units }).split("\r\n").slice(1)).toEqual([
      `"'=J,1",Hz,,,7,7,0.1,7.5,-0.5,,,`,
      "",
    ]);
    const facts = {
      ...{ temperatureK: 253, level: "M", weights: "copies" },
      ...{ sigma: null, draws: null, seed: null },
    };
    expect(agreementCsv([], facts, { rows, units }).split("\r\n")[1]).toBe(
      `properties,Hz,,all,,1,0.5,0.5,0.5,"'=J,1",,,,253,M,copies,,,`,
    );
  });
});

describe("a measured value as it is shown", () => {
  it("keeps the digits it was typed with", () => {
    expect(asTyped(7, 2)).toBe("7.00");
    expect(asTyped(63.5, 0)).toBe("63.5");
    expect(asTyped(7.2534, 2)).toBe("7.2534");
  });
});
