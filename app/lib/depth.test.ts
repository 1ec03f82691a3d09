import { expect, test } from "vitest";
import { depthColour, depthStep } from "./depth.ts";

// Break points of the design page, section 3: below 1 %, 1, 2, 5, 10, 20, 40 % and more.
test("a tint step begins at its lower bound", () => {
  expect([0, 0.0099, 0.01, 0.02, 0.05, 0.1, 0.2, 0.4, 1].map(depthStep)).toEqual([1, 1, 2, 3, 4, 5, 6, 7, 7]);
});

test("what is no number has the palest tint", () => {
  expect(depthStep(Number.NaN)).toBe(1);
  expect(depthColour(0.285)).toBe("var(--color-depth-6)");
});
