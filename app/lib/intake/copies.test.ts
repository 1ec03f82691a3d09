import { expect, it } from "vitest";
import { CopyFinder } from "./copies.ts";

const positions = (k: number) => Float64Array.of(k, Math.sin(k), -k / 7);

it("finds the first frame with the same content among thousands, whatever it has to grow", () => {
  const finder = new CopyFinder();
  for (let k = 1; k <= 3000; k++) expect(finder.find(k, 0, positions(k), "1.5")).toBeNull();
  for (let k = 1; k <= 3000; k += 7) expect(finder.find(3000 + k, 0, positions(k), "1.5")).toBe(k);
});

it("takes shape, energy and the last bit of a coordinate as part of the content", () => {
  const finder = new CopyFinder();
  expect(finder.find(1, 0, positions(5), "1.5")).toBeNull();
  expect(finder.find(2, 1, positions(5), "1.5")).toBeNull();
  expect(finder.find(3, 0, positions(5), "1.50")).toBeNull();
  expect(finder.find(4, 0, positions(5), null)).toBeNull();
  const next = positions(5);
  next[1] = next[1]! + Number.EPSILON;
  expect(finder.find(5, 0, next, "1.5")).toBeNull();
  expect(finder.find(6, 0, positions(5), "1.5")).toBe(1);
  expect(finder.find(7, 0, next, "1.5")).toBe(5);
});
