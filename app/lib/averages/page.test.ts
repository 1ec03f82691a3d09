import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { momentsOf } from "./average.ts";
import {
  defaultAveragesState,
  readAveragesState,
  withTemperature,
  writeAveragesState,
} from "./averages-state.ts";
import type { PropertyValues } from "./property-set.ts";
import { averageDraws } from "./property-set.ts";
import { valueHistogram } from "./value-histogram.ts";
import { averagesFinding, digitsFor } from "./words.ts";

describe("state in the address", () => {
  it("comes back as it was written, beside what others hold there", () => {
    fc.assert(
      fc.property(
        fc.uniqueArray(fc.integer({ min: 100, max: 1000 }), { maxLength: 6 }),
        fc.integer({ min: 0, max: 2000 }),
        fc.boolean(),
        (kelvins, hundredths, taken) => {
          const state = {
            ...defaultAveragesState(),
            temperatures: [...kelvins].sort((a, b) => a - b),
            sigmaKcal: taken ? null : hundredths / 100,
            sigmaFrom: taken ? "a".repeat(16) : null,
            property: "b".repeat(16),
          };
          const params = writeAveragesState(state, new URLSearchParams("T=310&sel=4"));
          expect(readAveragesState(params)).toEqual(state);
          expect([params.get("T"), params.get("sel")]).toEqual(["310", "4"]);
        },
      ),
      { seed: 8, numRuns: 200 },
    );
  });
  it("leaves defaults out, and takes nonsense as absent", () => {
    expect(writeAveragesState(defaultAveragesState(), new URLSearchParams()).toString()).toBe("");
    expect(readAveragesState(new URLSearchParams("Ts=x,99,300&sig=-1&by=DROP&alike=z"))).toEqual({
      ...defaultAveragesState(),
      temperatures: [300],
    });
    expect(withTemperature([253, 323], 298.15)).toEqual([253, 298.15, 323]);
  });
});

describe("where the shapes lie", () => {
  const facts = (n: number, degeneracy = 1) => ({
    degeneracies: new Array(n).fill(degeneracy),
    mirrorMerged: degeneracy === 2,
  });

  it("every share lies in one bin, and bins have one round width", () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -50, max: 50, noNaN: true }), { minLength: 1, maxLength: 12 }),
        (values) => {
          const shares = values.map(() => 1 / values.length);
          const found = valueHistogram(momentsOf({ rule: "linear", values }, facts(values.length)), shares)!;
          expect(found.bins.reduce((sum, bin) => sum + bin.share, 0)).toBeCloseTo(1, 9);
          for (const bin of found.bins) {
            expect(bin.to - bin.from).toBeCloseTo(found.width, 6);
            for (const { index } of bin.parts) {
              expect(values[index]!).toBeGreaterThanOrEqual(bin.from - 1e-6);
              expect(values[index]!).toBeLessThanOrEqual(bin.to + 1e-6);
            }
          }
        },
      ),
      { seed: 21, numRuns: 200 },
    );
  });
  it("a torsion of a mirror pair stands half at each sign", () => {
    const found = valueHistogram(momentsOf({ rule: "circular", values: [65] }, facts(1, 2)), [1])!;
    expect(found.bins.filter((bin) => bin.share > 0).map((bin) => [bin.from, bin.share])).toEqual([
      [-75, 0.5],
      [60, 0.5],
    ]);
  });
});

describe("words", () => {
  const property: PropertyValues = {
    ...{
      id: "a",
      name: "d H16–H26",
      unit: "Å",
      rule: "r-6" as const,
      origin: "observable",
      definition: null,
    },
    ...{ quantity: null, atoms: null, values: [2.5, 4] },
  };
  const average = {
    ...{
      value: 5.5,
      spread: 1.13,
      covered: 0.972,
      state: "averaged" as const,
      resultant: null,
      fixed: false,
    },
  };
  const told = (change: object) =>
    averagesFinding(
      {
        property,
        average: { ...average, ...change },
        mover: { name: "c2", population: 0.16, share: 0.587, without: 6.19 },
      },
      [{ property, average: { ...average, ...change } }],
      298.15,
    );

  it("say the figure, what makes it, and what is not covered", () => {
    const { text, second } = told({});
    expect(text).toBe(
      "An NOE sees d H16–H26 as 5.50\u00a0Å at 298.15\u00a0K. c2 moves that figure most: 16\u00a0% of the ensemble, 59\u00a0% of the average. Without it: 6.19\u00a0Å.",
    );
    expect(second).toBe("One property. d H16–H26 covers 97.2\u00a0% of the population.");
  });
  it("say why there is no figure", () => {
    expect(told({ value: null, covered: 0.541, state: "not-covered" }).text).toContain(
      "54.1\u00a0% of the population only",
    );
    expect(told({ value: null, state: "undefined", resultant: 0.02 }).text).toContain("cancel");
    expect(told({ value: null, state: "zero-distance" }).text).toContain("distance of 0");
    expect(told({ value: 0, fixed: true }).text).toContain("fixed by symmetry");
  });
  it("use the digits of the trade", () => {
    expect([
      digitsFor("°", 180),
      digitsFor("ppm", 127.4),
      digitsFor("Hz", 7.4),
      digitsFor(null, 0.012),
    ]).toEqual([0, 2, 2, 4]);
  });
  it("take ten thousand draws unless that would keep a processor busy", () => {
    expect(averageDraws(31, 8)).toBe(10_000);
    expect(averageDraws(5000, 100)).toBe(726);
    expect(averageDraws(50_000, 100)).toBe(500);
  });
});
