import { expect, it } from "vitest";
import { inRange, stillTyped } from "./number-field.tsx";

it("takes the ends of a range, but not the end that a value lies above", () => {
  expect(inRange(100, { min: 100, max: 1000 })).toBe(true);
  expect(inRange(1000, { min: 100, max: 1000 })).toBe(true);
  expect(inRange(99.99, { min: 100 })).toBe(false);
  expect(inRange(0, { min: 0, above: true })).toBe(false);
  expect(inRange(0.001, { min: 0, above: true })).toBe(true);
  expect(inRange(-5, {})).toBe(true);
});

it("keeps what is typed while other settings change, but not what was refused", () => {
  const refused = { text: "0.3.3", over: 0.2, beside: "a", refused: "0.3.3" };
  expect(stillTyped(refused, 0.2, "a")).toBe(true);
  expect(stillTyped(refused, 0.2, "b")).toBe(false);
  expect(stillTyped(refused, 0.3, "a")).toBe(false);
  expect(stillTyped({ ...refused, text: "0.33" }, 0.2, "b")).toBe(true);
});
