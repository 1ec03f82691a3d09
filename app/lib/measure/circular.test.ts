import { describe, expect, it } from "vitest";
import { circularMean, torsionMean } from "./circular.ts";

// Values worked by hand from z = Σ p exp(i t); three of the four sets stand in the project's table of check values.
describe("circularMean", () => {
  it("puts 350° and 10° at 0, not at 180", () => {
    const { mean, resultant } = circularMean([350, 10]);
    expect(mean).toBeCloseTo(0, 10);
    expect(resultant).toBeCloseTo(0.984808, 6);
  });

  it("has no mean for 60, -60 and 180 in equal parts", () => {
    const { mean, resultant } = circularMean([60, -60, 180]);
    expect(resultant).toBeCloseTo(0, 12);
    expect(mean).toBeNull();
  });

  it("gives 176.9959° for 175, -175 and 170 at 0.5, 0.3 and 0.2", () => {
    const { mean, resultant, deviation } = circularMean([175, -175, 170], [0.5, 0.3, 0.2]);
    expect(mean).toBeCloseTo(176.9959, 4);
    expect(resultant).toBeCloseTo(0.995285, 6);
    expect(deviation).toBeCloseTo((Math.sqrt(-2 * Math.log(resultant)) * 180) / Math.PI, 12);
  });

  it("does not hang on the scale of the weights", () => {
    expect(circularMean([175, 170], [50, 20]).mean).toBeCloseTo(
      circularMean([175, 170], [0.5, 0.2]).mean ?? 0,
      12,
    );
  });

  it("leaves undefined angles out with their weight", () => {
    expect(circularMean([30, null], [0.2, 0.8])).toMatchObject({ resultant: 1 });
    expect(circularMean([null])).toEqual({ mean: null, resultant: 0, deviation: null });
    expect(circularMean([])).toEqual({ mean: null, resultant: 0, deviation: null });
  });

  it("refuses lists of different length and weights below zero", () => {
    expect(() => circularMean([1, 2], [1])).toThrow(RangeError);
    expect(() => circularMean([1], [-0.1])).toThrow(RangeError);
    expect(() => circularMean([1], [Number.NaN])).toThrow(RangeError);
  });
});

describe("torsionMean", () => {
  it("gives butane's 180° with R 0.400224 when gauche stands for both hands", () => {
    const { mean, resultant } = torsionMean([180, 65], [0.5784, 0.4216], [1, 2]);
    expect(mean).toBe(180);
    expect(resultant).toBeCloseTo(0.400224, 5);
    const listed = circularMean([180, 65, -65], [0.5784, 0.2108, 0.2108]);
    expect(resultant).toBeCloseTo(listed.resultant, 12);
  });

  it("without the pair the mean would lean to one hand", () => {
    expect(torsionMean([180, 65], [0.5784, 0.4216], [1, 1]).mean).not.toBeCloseTo(180, 0);
  });
});
