import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  countWord,
  depthStep,
  fixed,
  formatAngle,
  formatBytes,
  formatChecksum,
  formatCount,
  formatDate,
  formatDateShort,
  formatDateTime,
  formatEnergy,
  formatMoment,
  formatPercent,
  formatPopulation,
  formatRaw,
  formatRmsd,
  formatSeconds,
  formatTemperature,
  formatWindowAsSet,
  formatWindowToCarry,
  formulaParts,
  plural,
  pluralWord,
  rawValue,
  readNumber,
  readTyped,
  rmsdsBeside,
  signed,
  trimmed,
  windowToCarry,
  withUnit,
} from "./format.ts";

describe("numbers", () => {
  it("write a true minus and never a minus before zero", () => {
    expect(fixed(-1.1533771358995903, 2)).toBe("\u22121.15");
    expect(fixed(-0.001, 2)).toBe("0.00");
    expect(fixed(-0, 1)).toBe("0.0");
    expect(signed(0.06, 2)).toBe("+0.06");
    expect(signed(-0.73, 2)).toBe("\u22120.73");
    expect(signed(0.001, 2)).toBe("0.00");
  });

  it("group thousands and leave absent values a dash", () => {
    expect(formatCount(1200)).toBe("1,200");
    expect(formatCount(1234567)).toBe("1,234,567");
    expect(formatCount(999)).toBe("999");
    expect(fixed(5077.04, 1)).toBe("5,077.0");
    for (const nothing of [null, undefined, Number.NaN, Number.POSITIVE_INFINITY]) {
      expect(fixed(nothing, 2)).toBe("\u2013");
    }
    expect(withUnit("\u2013", "K")).toBe("\u2013");
  });

  it.each([
    [
      [0.15, 0.34561],
      ["0.150", "0.346"],
    ],
    [
      [0.1502, 0.34561],
      ["0.1502", "0.3456"],
    ],
    [
      [0.14996, 0.1502, 0.15],
      ["0.14996", "0.15020", "0.15000"],
    ],
    [
      [0.1502, 0.0004, 0],
      ["0.1502", "below 0.001", "0.0000"],
    ],
  ])("write a column beside its limit with the same decimals: %j", (values, texts) => {
    expect(values.map(rmsdsBeside(values, 0.15))).toEqual(texts);
  });

  it("carry the digits of each quantity", () => {
    expect(formatEnergy(0.3449)).toBe("0.34");
    expect(formatEnergy(1.44, "kJ/mol")).toBe("1.4");
    expect(formatPopulation(0.28549)).toBe("28.5");
    expect(formatPercent(0.6912)).toBe("69\u00a0%");
    expect(formatRmsd(0.34561)).toBe("0.346");
    expect(formatRmsd(0.0004)).toBe("below 0.001");
    expect(formatRmsd(0)).toBe("0.000");
    expect(formatAngle(-153.6)).toBe("\u2212154");
    expect(formatTemperature(298.15)).toBe("298.15");
    expect(formatTemperature(300)).toBe("300");
    expect(formatTemperature(1000)).toBe("1000");
    expect(trimmed(0.25, 3)).toBe("0.25");
    expect(trimmed(10, 2)).toBe("10");
  });

  it("give back every digit of the raw value", () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => {
        expect(Number(rawValue(value))).toBe(value === 0 ? 0 : value);
        expect(readTyped(formatRaw(value))).toBe(value === 0 ? 0 : value);
      }),
      { seed: 4711, numRuns: 300 },
    );
  });

  it("read back as typed once the grouping is taken out", () => {
    fc.assert(
      fc.property(fc.double({ min: -1e9, max: 1e9, noNaN: true }), (value) => {
        const back = readTyped(fixed(value, 3).replaceAll(",", ""));
        expect(Math.abs((back ?? Number.NaN) - value)).toBeLessThanOrEqual(0.0005 * (1 + 1e-9));
      }),
      { seed: 4712, numRuns: 300 },
    );
  });

  it("read a number only when the whole text is one", () => {
    expect(readTyped(" \u22120.25 ")).toBe(-0.25);
    expect(readTyped("1e3")).toBe(1000);
    expect(readTyped(".5")).toBe(0.5);
    for (const text of ["", "1,234", "5x", "0x10", "nan", "1.2.3", "--1", "1e999"])
      expect(readTyped(text)).toBeNull();
  });

  it("read a decimal comma where it can mean nothing else, and say so where it can", () => {
    expect(readTyped("310,5")).toBe(310.5);
    expect(readTyped("0,3")).toBe(0.3);
    expect(readTyped("0,300")).toBe(0.3);
    expect(readTyped("\u22121234,567")).toBe(-1234.567);
    for (const text of ["1,234", "-1,234", "1,234,567", "1.234,5", "1,234.5", ","])
      expect(readTyped(text)).toBeNull();
    expect(readNumber("1,234")).toMatchObject({ fault: expect.stringContaining("use a point") });
    expect(readNumber("1,234.5")).toMatchObject({ fault: expect.stringContaining("use one point") });
  });

  it("read the field's own unit behind a number, and name another one", () => {
    expect(readTyped("298.15 K", "K")).toBe(298.15);
    expect(readTyped("298,15\u00a0k", "K")).toBe(298.15);
    expect(readTyped("0.3 A", "Å")).toBe(0.3);
    expect(readTyped("3 kcal/mol", "kcal/mol")).toBe(3);
    expect(readTyped("1e3 K", "K")).toBe(1000);
    expect(readNumber("25 °C", "K")).toEqual({
      value: null,
      fault: "“25 °C” ends in “°C”: a number in K is read here.",
    });
    expect(readTyped("12 kJ/mol", "kcal/mol")).toBeNull();
    expect(readTyped("298.15 K")).toBeNull();
  });
});

describe("words", () => {
  it("count in words up to twelve", () => {
    expect(countWord(9)).toBe("nine");
    expect(countWord(0)).toBe("no");
    expect(countWord(31)).toBe("31");
    expect(plural(1, "frame")).toBe("1 frame");
    expect(plural(3910, "frame")).toBe("3,910 frames");
    expect(pluralWord(2, "series", "series")).toBe("two series");
  });

  it("say sizes in steps of 1024 and times as one would", () => {
    expect(formatBytes(0)).toBe("0\u00a0bytes");
    expect(formatBytes(1)).toBe("1\u00a0byte");
    expect(formatBytes(41 * 1024)).toBe("41\u00a0kB");
    expect(formatBytes(1_153_434)).toBe("1.1\u00a0MB");
    expect(formatBytes(512 * 2 ** 20)).toBe("512\u00a0MB");
    expect(formatSeconds(0.104)).toBe("0.1\u00a0s");
    expect(formatSeconds(0.004)).toBe("under 0.01\u00a0s");
    expect(formatSeconds(9)).toBe("9.0\u00a0s");
    expect(formatSeconds(40)).toBe("40\u00a0s");
    expect(formatSeconds(130)).toBe("2\u00a0min");
  });
});

describe("dates", () => {
  it("stand in UTC whatever the zone of the machine", () => {
    expect(formatDate("2026-12-01T23:59:00Z")).toBe("1 December 2026");
    expect(formatDateShort("2026-11-27T01:00:00+02:00")).toBe("26 Nov 2026");
    expect(formatDateTime("2026-12-01T14:02:31.000Z")).toBe("1 December 2026, 14:02 UTC");
    expect(formatDate("never")).toBe("\u2013");
  });

  it("say today and yesterday as seen from the moment given", () => {
    const now = "2026-12-01T00:30:00Z";
    expect(formatMoment("2026-12-01T00:02:00Z", now)).toBe("today 00:02");
    expect(formatMoment("2026-11-30T23:59:00Z", now)).toBe("yesterday");
    expect(formatMoment("2026-11-29T23:59:00Z", now)).toBe("29 Nov 2026");
  });

  it("shorten a checksum to its ends", () => {
    expect(formatChecksum(`9c410b7e${"0".repeat(52)}5d20`)).toBe("9c41 0b7e \u2026 5d20");
  });
});

describe("formulaParts", () => {
  const spell = (formula: string) =>
    formulaParts(formula)
      .map((p) => (p.as === "plain" ? p.text : `<${p.as} ${p.text}>`))
      .join("");

  it("sets counts low, mass numbers and charges high", () => {
    expect(spell("C11H17NO2S")).toBe("C<sub 11>H<sub 17>NO<sub 2>S");
    expect(spell("[13C]C5H6")).toBe("[<sup 13>C]C<sub 5>H<sub 6>");
    expect(spell("C2H3O2-")).toBe("C<sub 2>H<sub 3>O<sub 2><sup \u2212>");
    expect(spell("")).toBe("");
  });

  it("loses no character", () => {
    fc.assert(
      fc.property(fc.string({ maxLength: 20 }), (text) => {
        expect(
          formulaParts(text)
            .map((p) => p.text)
            .join("")
            .replaceAll("\u2212", "-"),
        ).toBe(text.replaceAll("\u2212", "-"));
      }),
      { seed: 4713, numRuns: 300 },
    );
  });
});

describe("depthStep", () => {
  it("breaks at 1, 2, 5, 10, 20 and 40 per cent, the break belonging to the deeper tint", () => {
    const steps = [0.0099, 0.01, 0.02, 0.05, 0.1, 0.2, 0.4, 1].map(depthStep);
    expect(steps).toEqual([1, 2, 3, 4, 5, 6, 7, 7]);
  });
});

describe("windows to carry", () => {
  it.each([
    [2.040877, "2.05"],
    [6.084513, "6.09"],
    [2.04, "2.04"],
    [1.1, "1.10"],
    [0.29, "0.29"],
    [0, "0.00"],
    [1234.501, "1,234.51"],
    // A difference of energies that lies a rounding above what its digits say would be lost at these digits.
    [3.06 + 2 ** -51, "3.07"],
    // One that lies a rounding below them is held by them.
    [5.1 - 3.06, "2.04"],
  ])("%f is printed %s: up at the last digit", (kcal, text) => {
    expect(formatWindowToCarry(kcal)).toBe(text);
  });

  it("hold the conformer they were read off from and not the next one", () => {
    const energy = fc.double({ min: 0, max: 50, noNaN: true });
    fc.assert(
      fc.property(energy, fc.double({ min: 2e-6, max: 3, noNaN: true }), (kcal, gap) => {
        const carried = windowToCarry(kcal, kcal + gap);
        expect(carried).toBeGreaterThanOrEqual(kcal);
        expect(carried).toBeLessThan(kcal + gap);
        expect(Number(formatWindowToCarry(kcal, kcal + gap))).toBe(carried);
      }),
      { seed: 20261202, numRuns: 500 },
    );
  });

  it("take further decimals where two would let in the next conformer, and as many as were set", () => {
    expect(formatWindowToCarry(2.040877, 2.045)).toBe("2.041");
    expect(formatWindowToCarry(2.0408771234, 2.0408771235)).toBe("2.05");
    expect(formatWindowToCarry(null)).toBe("\u2013");
    expect([2.5, 2.041, 0].map(formatWindowAsSet)).toEqual(["2.50", "2.041", "0.00"]);
  });
});
