import { describe, expect, it } from "vitest";
import { againstUncertainty, type ComparedAverage } from "./compare.ts";
import { pairFault } from "./compared-pair.ts";
import { whyNoAverage } from "./why-no-average.ts";

const plain = (text: string | null) => text?.replace(/\s/g, " ");
const NONE = "covers 43 % of the population: no average below 90 %";

describe("an average that is not given", () => {
  it("says why", () => {
    expect(plain(whyNoAverage({ average: null, covered: 0.431, rule: "linear" }))).toBe(NONE);
    // 89.96 % is not to read as the 90 % that it misses.
    expect(plain(whyNoAverage({ average: null, covered: 0.8996, rule: "linear" }))).toContain("89.9 %");
    expect(whyNoAverage({ average: null, covered: 1, rule: "circular" })).toContain("no mean direction");
    expect(whyNoAverage({ average: 3.2, covered: 0.95, rule: "linear" })).toBeNull();
  });

  it("says so in a comparison, in place of how the change stands", () => {
    const row: ComparedAverage = {
      ...{ property: "J", unit: "Hz", before: 3.1, after: null, sdBefore: 0.1, sdAfter: null },
      ...{ noneBefore: null, noneAfter: NONE, beyond: null },
    };
    expect(againstUncertainty(row, 1, 2)).toBe(`edition 2: ${NONE}`);
    expect(againstUncertainty({ ...row, before: null, noneBefore: NONE }, 1, 2)).toBe(`in both: ${NONE}`);
    expect(againstUncertainty({ ...row, after: 3, noneAfter: null }, 1, 2)).toContain(
      "edition 2: no uncertainty",
    );
    expect(againstUncertainty({ ...row, beyond: true }, 1, 2)).toBe("larger");
  });
});

describe("two editions that an address names", () => {
  it("are compared, or it says why not", () => {
    expect(pairFault([1, 2], [2, 1])).toBeNull();
    expect(pairFault([1, 1], [2, 1])).toMatch(/^Edition 1 is named twice/);
    expect(pairFault([1, 9], [2, 1])).toMatch(/^Edition 9 is not listed here/);
    expect(pairFault([0, 2], [2, 1])).toMatch(/does not name two editions by their numbers/);
    expect(pairFault([1, 2], [1])).toMatch(/takes two editions; there is 1 edition here/);
  });
});
