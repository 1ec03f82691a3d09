import { describe, expect, it } from "vitest";
import { farOff } from "./energy-remarks.ts";
import { batchSpread, spreadWarning } from "./whole-spread.ts";

const level = (values: number[]) => ({
  name: "A",
  unit: "kcal/mol" as const,
  frames: values.map((_, k) => k + 1),
  values,
});
const ten = [8.1, 8.2, 8.6, 9, 9.4, 8.8, 8.3, 8.9, 10, 9.7];

describe("a further batch", () => {
  it("on another scale is told with its frames and the distance", () => {
    const found = batchSpread(level([...ten, -174133, -174132.4]), 11);
    expect(found).toHaveLength(1);
    expect(found[0]?.message).toContain("frames 11 to 12");
    expect(found[0]?.message).toContain("174,141 kcal/mol below");
    expect(found[0]?.hint).toContain("unit");
  });

  it("with one frame far off names it", () => {
    expect(batchSpread(level([...ten, -500]), 11)).toMatchObject([{ frame: 11 }]);
  });

  it("that shows a few frames of the first upload to be the odd ones names those", () => {
    const many = Array.from({ length: 40 }, (_, k) => -170000 + k / 10);
    expect(batchSpread(level([8, 9, ...many]), 3).map(({ frame }) => frame)).toEqual([1, 2]);
  });

  it("of the same scale says nothing", () => {
    expect(batchSpread(level([...ten, 30, 8.15]), 11)).toEqual([]);
  });

  it("says nothing anew of a level that was as wide before", () => {
    expect(batchSpread(level([0, 500, 250, 100]), 4)).toEqual([]);
    expect(batchSpread(level([0, 500, 900]), 3)).toHaveLength(1);
  });

  it("of one frame beside one equal to it is told", () => {
    expect(batchSpread(level([1, 1]), 2)[0]?.message).toContain("All 2 energies");
    expect(batchSpread(level([1, 1.001]), 2)[0]?.message).toContain("within 0.02");
  });

  it("is not compared with nothing", () => {
    expect(batchSpread(level([1, 500]), 1)).toEqual([]);
  });
});

describe("a level's spread", () => {
  it("of more than 100 kcal/mol or less than 0.02 is a warning", () => {
    expect(spreadWarning("A", "kcal/mol", [8.1, -174133])).toContain("174,141 kcal/mol");
    expect(spreadWarning("A", "kcal/mol", [1, 1.01])).toContain("within 0.02");
    expect(spreadWarning("A", "kcal/mol", [2, 2])).toContain("all equal");
    expect(spreadWarning("A", "kcal/mol", [1, 2, 99])).toBeNull();
    expect(spreadWarning("A", "kcal/mol", [1])).toBeNull();
  });

  it("has no far-off ones among three, nor where too many are", () => {
    expect(farOff([0, 1, -500], "kcal/mol")).toEqual([]);
    expect(farOff([0, 1, 2, 3, -500, -500], "kcal/mol")).toEqual([]);
    expect(farOff([0, 1, 2, -500], "kcal/mol")).toEqual([3]);
  });
});
