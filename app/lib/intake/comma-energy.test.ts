import { describe, expect, it } from "vitest";
import { commaEnergy, commaField, fieldsWithPoints } from "./comma-energy.ts";

describe("an energy with a decimal comma (row X22)", () => {
  it.each([
    ["energy=-15,775161", "-15,775161"],
    ["E = -76,0267 Eh", "-76,0267"],
    ["  -76,0267 ", "-76,0267"],
    ["conf 3 energy: -1,5e-3", "-1,5e-3"],
  ])("%j holds %s", (comment, text) => {
    expect(commaEnergy(comment)).toBe(text);
  });

  it.each(["energy=-15.7", "E = -1,234.5", "conf 1, 2", "time=1,5", 'Properties="species,1"', "1.234,5", ""])(
    "%j holds none",
    (comment) => {
      expect(commaEnergy(comment)).toBeNull();
    },
  );
});

describe("a data field with a decimal comma (rows X22, S20)", () => {
  const record = (name: string, value: string) =>
    new Map([
      ["id", ["1"]],
      [name, [value]],
    ]);

  it.each([
    ["dG (kJ/mol)", "-12,3", "-12,3"],
    ["Energy", "-15,775161 kcal/mol", "-15,775161"],
  ])("%s: %s", (name, value, found) => {
    expect(commaField(record(name, value))).toBe(found);
  });

  it.each([
    ["Energy", "-12.3"],
    ["Energy", "1.234,5"],
    ["Energy", "1,2 and 3,4 and more of it"],
    ["Energy", "low, high"],
    ["dipole", "1,85"],
  ])("is none in %s: %s", (name, value) => {
    expect(commaField(record(name, value))).toBeNull();
  });

  it("is asked of other fields where they are wanted, and read with points", () => {
    const fields = record("dipole", "1,85 D");
    expect(commaField(fields, () => true)).toBe("1,85");
    expect(fieldsWithPoints(fields).get("dipole")).toEqual(["1.85 D"]);
  });
});
