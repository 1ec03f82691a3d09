import { describe, expect, test } from "vitest";
import { boundUnit, classify } from "./energy-words.ts";
import { energiesAsWritten, extractFieldEnergy, scanFields } from "./field-energies.ts";

const fieldsOf = (entries: Record<string, string | string[]>) =>
  new Map(Object.entries(entries).map(([name, value]) => [name, [value].flat()]));

/** Number, unit and class of one field. */
function scanOne(name: string, value: string | string[]) {
  const scanned = scanFields(fieldsOf({ [name]: value }));
  const number = scanned.numbers[0];
  return number ? [number.value, boundUnit(number, scanned), classify(number)] : null;
}

describe("numbers of data fields", () => {
  test.each([
    ["MMFF94_ENERGY_KCAL_MOL", "-39.455768", [-39.455768, "kcal/mol", "energy"]],
    ["dG (kJ/mol)", "-51.5", [-51.5, "kJ/mol", "energy"]],
    ["E", "-12.3 kcal/mol", [-12.3, "kcal/mol", "energy"]],
    ["E", "-12.3kcal/mol", [-12.3, "kcal/mol", "energy"]],
    ["E", " -12.3 kcal mol^-1 ", [-12.3, "kcal/mol", "energy"]],
    ["E", "-12.3 (kJ/mol)", [-12.3, "kJ/mol", "energy"]],
    ["E", "\u221212.3 kcal/mol", [-12.3, "kcal/mol", "energy"]],
    ["Energy", "-76.4 a.u. B3LYP", [-76.4, "hartree", "energy"]],
    ["total energy [eV]", "-1.5D3", [-1500, "eV", "energy"]],
    ["value", "-12.3 kcal/mol", [-12.3, "kcal/mol", "unit"]],
    ["logP", "3.25", [3.25, null, "loose"]],
    ["CONFORMER_NUMBER", "17", [17, null, "other"]],
    ["energy_gap", "5.0 eV", [5, "eV", "other"]],
    ["distance", "5.0 Å", [5, null, "other"]],
    ["twice the same", ["1.5", "1.5 "], [1.5, null, "loose"]],
    ["E", "0.6\n\nstray", [0.6, null, "energy"]],
    ["E", "-12.3 kcal/mol\n\nfound by hand in 2 steps\nand more", [-12.3, "kcal/mol", "energy"]],
    ["E", `0.6\n\n${"x".repeat(300)}`, [0.6, null, "energy"]],
  ])("%s: %j", (name, value, expected) => {
    expect(scanOne(name, value)).toEqual(expected);
  });

  test.each([
    ["text", "MMFF94"],
    ["date", "2026-12-01"],
    ["vector", "1 2 3"],
    ["share", "1 of 40"],
    ["sentence", "3 atoms were moved by hand"],
    ["lines", "1\n2"],
    ["comma", "-12,3"],
    ["glued", "5x"],
    ["kelvin by mistake", "5k"],
    ["two values", ["1.5", "1.6"]],
    ["two values that begin alike", ["1.5", "1.5\n\nstray"]],
    ["a further number behind the end of the value", "0.6\n\n0.7"],
    ["a unit behind the end of the value", "0.6\n\nkcal/mol"],
    ["empty", ""],
    ["long", `1 ${"x".repeat(300)}`],
  ])("%s is none: %j", (name, value) => {
    expect(scanOne(name, value)).toBeNull();
  });

  test("a field of its own names the unit", () => {
    const scanned = scanFields(fieldsOf({ energy: "-1.5", energy_unit: "kJ/mol" }));
    expect(boundUnit(scanned.numbers[0]!, scanned)).toBe("kJ/mol");
  });

  test("every field keeps its place and its text", () => {
    const scanned = scanFields(fieldsOf({ method: "MMFF94", E: "-1.5", "": "7", note: "" }));
    expect(scanned.numbers.map(({ position, key }) => [position, key])).toEqual([[2, "E"]]);
    expect([...scanned.keyed.keys()]).toEqual(["method", "E"]);
  });
});

describe("the energy of a record by the name of its field", () => {
  const fields = fieldsOf({ E: "-12.3 kcal/mol", twice: ["1", "2"], blank: " ", comma: "-1,5" });

  test("is exact in case, and missing stays missing", () => {
    expect(extractFieldEnergy(fields, "E")).toEqual({ text: "-12.3", value: -12.3 });
    expect(extractFieldEnergy(fields, "e")).toBeNull();
    expect(extractFieldEnergy(fields, "blank")).toBeNull();
  });

  test("is no number where the text is none, or where two values disagree", () => {
    expect(extractFieldEnergy(fields, "comma")).toEqual({ problem: "-1,5" });
    expect(extractFieldEnergy(fields, "twice")).toEqual({ problem: "1 | 2" });
  });
});

test("copies are compared by what names an energy, nothing else", () => {
  expect(energiesAsWritten(fieldsOf({ CONFORMER_NUMBER: "1", MMFF94_ENERGY: "-1.5", E: "2" }))).toBe(
    "MMFF94_ENERGY=-1.5\nE=2",
  );
  expect(energiesAsWritten(fieldsOf({ CONFORMER_NUMBER: "1" }))).toBeNull();
});
