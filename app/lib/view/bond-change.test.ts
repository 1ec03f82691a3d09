import { describe, expect, it } from "vitest";
import { bondChange } from "./bond-change.ts";

/** Methanol: C1, O2, H3 on O2, H4 to H6 on C1. */
const elements = [6, 8, 1, 1, 1, 1];
const bonds = [0, 1, 1, 2, 0, 3, 0, 4, 0, 5];

describe("bondChange", () => {
  it("is null for the same bonds in any order", () => {
    expect(bondChange(elements, bonds, [5, 0, 4, 0, 3, 0, 2, 1, 1, 0])).toBeNull();
  });

  it("says which hydrogen moved where", () => {
    expect(bondChange(elements, bonds, [0, 1, 1, 2, 1, 3, 0, 4, 0, 5])).toEqual({
      formed: [1, 3],
      broken: [0, 3],
      moved: [3],
      words: "H4 now on O2",
    });
  });

  it("names bonds that only broke or formed, and marks their atoms", () => {
    expect(bondChange([6, 6, 8], [0, 1, 1, 2], [1, 2])).toMatchObject({
      words: "C1\u2013C2 broken",
      moved: [0, 1],
    });
    expect(bondChange([6, 6, 8], [0, 1], [0, 1, 1, 2])?.words).toBe("C2\u2013O3 formed");
  });
});
