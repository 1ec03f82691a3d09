import { describe, expect, it } from "vitest";
import { absentEnergy } from "../intake/energy-column.ts";
import { inPageWords } from "./page-words.ts";

describe("a message on a page", () => {
  it("names no field of a request", () => {
    const { message } = absentEnergy({ from: "key:energy", rows: [], problems: new Map() });
    expect(message).toContain("energyFrom");
    expect(inPageWords(message)).toBe(
      "No frame has “energy” as a number. Choose another one: names of keys and data fields are exact in case, and every number of the comment line counts from 1.",
    );
    expect(
      inPageWords("If one of their numbers is the energy, name it with energyFrom and read the files again."),
    ).toBe("If one of their numbers is the energy, choose it under “Read again with other answers” below.");
  });

  it("says what stands where the number should, and where", () => {
    const rows = [{ frame: 4, file: "a.sdf", line: 40 }];
    const { message, faults } = absentEnergy({
      from: "field:E",
      rows,
      problems: new Map([[0, "0.6\n\n0.7"]]),
    });
    expect(inPageWords(message)).toBe(
      "No frame has the data field “E” as a number. Found “0.6\\n\\n0.7” (a.sdf, record at line 40, frame 4). Write one number there, with its unit at most, or choose another number.",
    );
    expect(faults).toMatchObject([{ field: "energyFrom", file: "a.sdf", frame: 4, line: 40 }]);
  });

  it("that names none stays as it is", () => {
    expect(inPageWords("The frame has no energy.")).toBe("The frame has no energy.");
  });
});
