import { describe, expect, it } from "vitest";
import { pooledWindow, pooledWindowInterval } from "./pooled.ts";

const T = 298.15;
/** Two conformers of equal reference energy, so that 95 % needs both: the window is their gap at the level. */
const molecules = Array.from({ length: 10 }, (_, m) => ({ level: [0, (m + 1) / 2], reference: [3, 3] }));

describe("ten molecules that need 0.5, 1.0, ... 5.0 kcal/mol", () => {
  it("serves 9 of 10 with the ninth window, all with the last, half with the fifth", () => {
    const at = (ofMolecules: number) =>
      pooledWindow(molecules, { share: 0.95, ofMolecules, temperatureK: T });
    expect(at(0.9)).toMatchObject({ kcal: 4.5, reached: 9, molecules: 10 });
    expect(at(1)).toMatchObject({ kcal: 5, reached: 10 });
    expect(at(0.5)).toMatchObject({ kcal: 2.5, reached: 5 });
    expect(at(0.01)).toMatchObject({ kcal: 0.5, reached: 1 });
  });

  it("says of each what it needs and what the common window keeps", () => {
    const { each } = pooledWindow(molecules, { share: 0.95, ofMolecules: 0.9, temperatureK: T });
    expect(each[0]).toEqual({ kcal: 0.5, next: Infinity, count: 2, of: 2, kept: 1, keptCount: 2 });
    expect(each[9]).toMatchObject({ kcal: 5, keptCount: 1 });
    expect(each[9]!.kept).toBeCloseTo(0.5, 12);
  });

  it("keeps what it says for the number as printed, rounded up", () => {
    const odd = [0.5, 1.040877, 1.0449, 3].map((gap) => ({ level: [0, gap], reference: [3, 3] }));
    const found = pooledWindow(odd, { share: 0.95, ofMolecules: 0.5, temperatureK: T });
    expect(found).toMatchObject({ kcal: 1.040877, carriedKcal: 1.05, reached: 3 });
    expect(found.each.map(({ keptCount }) => keptCount)).toEqual([2, 2, 2, 1]);
  });

  it("does not know the order of the molecules", () => {
    const options = { share: 0.95, ofMolecules: 0.9, temperatureK: T };
    expect(pooledWindow([...molecules].reverse(), options).kcal).toBe(4.5);
  });

  it("gives an interval by drawing molecules, then conformers", () => {
    const found = pooledWindowInterval(molecules, {
      share: 0.95,
      ofMolecules: 0.9,
      temperatureK: T,
      seed: 3,
    });
    const { low, high } = found.intervals.kcal!;
    expect(low).toBeGreaterThanOrEqual(0);
    expect(low).toBeLessThan(4.5);
    expect(high).toBe(5);
    expect(found.resamples).toBe(2000);
  });
});

it("refuses nothing and shares that are none", () => {
  expect(() => pooledWindow([], { share: 0.95, ofMolecules: 0.9, temperatureK: T })).toThrow(RangeError);
  expect(() => pooledWindow(molecules, { share: 0, ofMolecules: 0.9, temperatureK: T })).toThrow(RangeError);
});
