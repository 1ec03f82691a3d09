import { describe, expect, it } from "vitest";
import { rankTicks } from "./ticks.ts";

describe("an axis of ranks", () => {
  it("names the first and every round one after it, nine at most", () => {
    expect(rankTicks(1)).toEqual([1]);
    expect(rankTicks(6)).toEqual([1, 2, 3, 4, 5, 6]);
    expect(rankTicks(24)).toEqual([1, 5, 10, 15, 20]);
    expect(rankTicks(58)).toEqual([1, 10, 20, 30, 40, 50]);
    expect(rankTicks(90)).toEqual([1, 20, 40, 60, 80]);
    expect(rankTicks(1000)).toEqual([1, 200, 400, 600, 800, 1000]);
    for (let most = 1; most <= 3000; most++) expect(rankTicks(most).length).toBeLessThanOrEqual(9);
  });
});
