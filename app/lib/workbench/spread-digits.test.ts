import { expect, test } from "vitest";
import { spreadDigits } from "./spread-digits.ts";

test("spreads of one column have the same decimals, enough for the smallest", () => {
  expect(spreadDigits([3, 0.3])).toBe(3);
  expect(spreadDigits([0.00354, null])).toBe(5);
  expect(spreadDigits([3, 12, null, 0])).toBe(0);
  expect(spreadDigits([2.5, 40])).toBe(2);
  expect(spreadDigits([5500, 0.0123])).toBe(4);
  expect(spreadDigits([12_345_678.5])).toBe(0);
  expect(spreadDigits([null])).toBe(0);
});
