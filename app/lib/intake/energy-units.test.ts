import { describe, expect, test } from "vitest";
import { parseEnergyUnit, unitOfName } from "./energy-units.ts";

describe("words for units of energy", () => {
  test.each([
    ["hartree", "hartree"],
    ["Hartrees", "hartree"],
    ["Eh", "hartree"],
    ["E_h", "hartree"],
    ["Ha", "hartree"],
    ["a.u.", "hartree"],
    ["A.U.", "hartree"],
    ["eV", "eV"],
    ["ev", "eV"],
    ["meV", "meV"],
    ["kcal/mol", "kcal/mol"],
    ["kcal mol-1", "kcal/mol"],
    ["kcal·mol⁻¹", "kcal/mol"],
    ["kcal mol^-1", "kcal/mol"],
    ["kcal*mol**-1", "kcal/mol"],
    ["kcal/mole", "kcal/mol"],
    ["KCAL_MOL", "kcal/mol"],
    ["(kcal/mol)", "kcal/mol"],
    ["kcal per mol", "kcal/mol"],
    ["kJ/mol", "kJ/mol"],
    ["kJ mol\u22121", "kJ/mol"],
    ["cm-1", "cm-1"],
    ["cm^-1", "cm-1"],
    ["1/cm", "cm-1"],
    ["K", "K"],
    ["k", null],
    ["MeV", null],
    ["fs", null],
    ["Å", null],
    ["constructor", null],
    ["", null],
  ])("%j is %j", (word, unit) => {
    expect(parseEnergyUnit(word)).toBe(unit);
  });
});

describe("units in keys and field names", () => {
  test.each([
    ["MMFF94_ENERGY_KCAL_MOL", "kcal/mol"],
    ["energy_ev", "eV"],
    ["E[kJ/mol]", "kJ/mol"],
    ["energy(hartree)", "hartree"],
    ["E/eV", "eV"],
    ["E_kJ/mol", "kJ/mol"],
    ["dG (kcal/mol)", "kcal/mol"],
    ["energy", null],
    ["E(RHF)", null],
    ["energy_k", null],
    ["eV", null],
  ])("%j: %j", (name, unit) => {
    expect(unitOfName(name)).toBe(unit);
  });
});
