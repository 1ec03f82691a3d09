import { describe, expect, it } from "vitest";
import { titleLines } from "./export-figure";

describe("titleLines", () => {
  it("breaks a title between words and loses none of them", () => {
    const title = "How the count hangs on the tolerance";
    expect(titleLines(title, 20)).toEqual(["How the count hangs", "on the tolerance"]);
    expect(titleLines(title, 200)).toEqual([title]);
    expect(titleLines(title, 1).join(" ")).toBe(title);
    expect(titleLines("  ", 20)).toEqual([]);
  });
});
