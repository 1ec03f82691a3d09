import { describe, expect, it } from "vitest";
import { absentEnergy } from "../intake/energy-column.ts";
import { inPageWords } from "./page-words.ts";

describe("a message on a page", () => {
  it("names no field of a request", () => {
    const { message } = absentEnergy("key:energy");
    expect(message).toContain("energyFrom");
    expect(inPageWords(message)).toBe(
      "No frame has “energy” as a number. Choose another one: names of keys and data fields are exact in case, and every number of the comment line counts from 1.",
    );
    expect(
      inPageWords("If one of their numbers is the energy, name it with energyFrom and read the files again."),
    ).toBe("If one of their numbers is the energy, choose it under “Read again with other answers” below.");
  });

  it("that names none stays as it is", () => {
    expect(inPageWords("The frame has no energy.")).toBe("The frame has no energy.");
  });
});
