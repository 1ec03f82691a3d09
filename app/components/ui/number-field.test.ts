import { expect, it } from "vitest";
import { inRange } from "./number-field.tsx";

it("takes the ends of a range, but not the end that a value lies above", () => {
  expect(inRange(100, { min: 100, max: 1000 })).toBe(true);
  expect(inRange(1000, { min: 100, max: 1000 })).toBe(true);
  expect(inRange(99.99, { min: 100 })).toBe(false);
  expect(inRange(0, { min: 0, above: true })).toBe(false);
  expect(inRange(0.001, { min: 0, above: true })).toBe(true);
  expect(inRange(-5, {})).toBe(true);
});
