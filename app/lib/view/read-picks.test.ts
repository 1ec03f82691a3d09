import { describe, expect, it } from "vitest";
import { readPicks, togglePick } from "./read-picks.ts";

const elements = [6, 6, 6, 6, 7, 16, 8, 8];

describe("readPicks", () => {
  it.each([
    ["C3 C4 N5 S6", [2, 3, 4, 5]],
    ["c3, c4; n5/s6", [2, 3, 4, 5]],
    ["3 4 5 6", [2, 3, 4, 5]],
    ["C3\u2013C4\u2013N5\u2013S6", [2, 3, 4, 5]],
    ["C3-C4", [2, 3]],
    ["C3 C3 3", [2]],
    ["", []],
  ])("reads %j", (text, atoms) => {
    expect(readPicks(text, elements)).toEqual({ ok: true, atoms });
  });

  it.each([
    ["C9", "No atom is called \u201cC9\u201d. They run from C1 to O8."],
    ["C0", "No atom is called \u201cC0\u201d. They run from C1 to O8."],
    ["ring", "No atom is called \u201cring\u201d. They run from C1 to O8."],
    ["N3", "Atom 3 is C3, not N3."],
    ["1 2 3 4 5", "Two atoms measure a distance, three an angle, four a torsion; these are 5."],
  ])("says what is wrong with %j", (text, message) => {
    expect(readPicks(text, elements)).toEqual({ ok: false, message });
  });
});

describe("togglePick", () => {
  it("adds, takes out, and begins anew after four", () => {
    expect(togglePick([], 3)).toEqual([3]);
    expect(togglePick([3, 5], 3)).toEqual([5]);
    expect(togglePick([1, 2, 3, 4], 7)).toEqual([7]);
  });
});
