import { describe, expect, it } from "vitest";
import { formulaRuns } from "./formula-runs.ts";

const formulas = (text: string) =>
  formulaRuns(text)
    .filter((run) => run.formula)
    .map((run) => run.text);

describe("formulaRuns", () => {
  it("finds formulas, and gives the whole sentence back", () => {
    const text = "Another molecule: C3H8, where the others are C2H4F2 or CH3Cl.";
    expect(formulas(text)).toEqual(["C3H8", "C2H4F2", "CH3Cl"]);
    expect(
      formulaRuns(text)
        .map((run) => run.text)
        .join(""),
    ).toBe(text);
  });

  it("leaves atoms, levels of theory and words alone", () => {
    expect(formulas("H14 has moved from N4 to O8; MMFF94 and B3LYP, MP2, at 300 K (X38).")).toEqual([]);
    expect(formulas("")).toEqual([]);
  });
});
