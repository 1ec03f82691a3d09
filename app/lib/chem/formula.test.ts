import { expect, it } from "vitest";
import { hillFormula } from "./formula.ts";

it.each([
  ["methanol", [8, 6, 1, 1, 1, 1], "CH4O"],
  ["bromoform-like order: C, H, then by symbol", [35, 17, 6, 1, 9], "CHBrClF"],
  ["sulfuric acid, no carbon: all by symbol", [16, 8, 8, 8, 8, 1, 1], "H2O4S"],
  ["hydrogen bromide", [1, 35], "BrH"],
  ["carbon tetrachloride", [6, 17, 17, 17, 17], "CCl4"],
  ["a dummy is left out", [0, 8, 1, 1], "H2O"],
  ["nothing", [], ""],
])("%s", (_name, elements, formula) => {
  expect(hillFormula(elements)).toBe(formula);
});

it("isotopes stand behind their element", () => {
  expect(hillFormula([6, 6, 1, 1, 1, 8], [0, 13, 2, 0, 2, 0])).toBe("C[13C]HD2O");
});
