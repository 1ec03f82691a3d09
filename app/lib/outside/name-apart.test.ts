import { expect, it } from "vitest";
import { nameApart } from "./name-apart.ts";

it("tells structures of one name apart, however long it is", () => {
  expect(nameApart("pose.sdf", new Set())).toBe("pose.sdf");
  expect(nameApart("pose.sdf", new Set(["pose.sdf", "pose.sdf, 2"]))).toBe("pose.sdf, 3");
  const long = "x".repeat(200);
  expect(nameApart(long, new Set([long]))).toBe(`${"x".repeat(197)}, 2`);
});
