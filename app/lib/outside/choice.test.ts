import { expect, test } from "vitest";
import { readOutsideChoice, writeOutsideChoice } from "./choice.ts";

test("a choice comes back from the address that it was written into, and leaves the rest alone", () => {
  const choice = { outside: "abc", set: "all", mirror: false, near: 0.8, over: 12 } as const;
  const params = writeOutsideChoice(choice, new URLSearchParams("v=1&T=310"));
  expect(params.get("T")).toBe("310");
  expect(readOutsideChoice(params)).toEqual(choice);
});

test("what is not understood counts as not said, and defaults are not written", () => {
  const plain = readOutsideChoice(new URLSearchParams("set=carbon&near=-1&over=1.5&hand=other"));
  expect(plain).toEqual({ outside: null, set: "heavy", mirror: true, near: 0.5, over: null });
  expect(writeOutsideChoice(plain, new URLSearchParams("near=2")).toString()).toBe("");
});
