import { describe, expect, it } from "vitest";
import { countsUp } from "./counter.ts";

describe("a column that counts up", () => {
  it("runs with the frames, from any number on, whatever the order of the set and what is missing", () => {
    expect(countsUp([7, 2, 30], [6, 1, 29])).toBe(true);
    expect(countsUp([7, 2, 12, 30], [1007, 1002, null, 1030])).toBe(true);
  });

  it("is no column of a property: other steps, fractions, one value for all", () => {
    expect(countsUp([1, 2, 3], [1, 2, 4])).toBe(false);
    expect(countsUp([1, 2, 3], [0.5, 1.5, 2.5])).toBe(false);
    expect(countsUp([1, 2, 3], [3, 3, 3])).toBe(false);
    expect(countsUp([1, 2, 3], [3, 2, 1])).toBe(false);
  });

  it("is not told from fewer than three values", () => {
    expect(countsUp([1, 2], [1, 2])).toBe(false);
    expect(countsUp([1, 2, 3], [1, null, 3])).toBe(false);
    expect(countsUp([], [])).toBe(false);
  });
});
