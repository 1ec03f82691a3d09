import { describe, expect, it } from "vitest";
import {
  type ColumnView,
  groupColumns,
  looksLikeLevel,
  proposedEnergyUnit,
  whyNoLevel,
} from "./columns-view.ts";

const column = (name: string, unit: string | null = null) => {
  return { name, unit, kind: "property" as const, atom: null, computed: false };
};

describe("a property that may be a level", () => {
  it("is any plain column of numbers without a unit or with one of energy", () => {
    expect(whyNoLevel(column("UFF_ENERGY_KCAL_MOL"))).toBeNull();
    expect(whyNoLevel(column("x", "kJ/mol"))).toBeNull();
    expect(whyNoLevel(column("x", "arbitrary"))).toBeNull();
    expect(whyNoLevel(column("d", "Å"))).toBe("is in Å, which is no unit of energy.");
    expect(whyNoLevel({ ...column("shift 3"), atom: 3 })).toContain("atom 3");
    expect(whyNoLevel({ ...column("twice"), computed: true })).toContain("computed");
    expect(whyNoLevel({ ...column("E"), kind: "energy" })).toContain("already");
  });

  it("has the unit that its own unit or its name spells", () => {
    expect(proposedEnergyUnit(column("UFF_ENERGY_KCAL_MOL"))).toBe("kcal/mol");
    expect(proposedEnergyUnit(column("E", "Eh"))).toBe("hartree");
    expect(proposedEnergyUnit(column("E_mp2"))).toBeNull();
  });

  it("looks like one by unit or name, and other numbers do not", () => {
    const like = ["UFF_ENERGY_KCAL_MOL", "energy", "E_mp2", "G_298", "free energy", "total_energy", "H_298"];
    expect(like.filter((name) => !looksLikeLevel(column(name)))).toEqual([]);
    const not = [
      "dipole",
      "CONFORMER_NUMBER",
      "radius of gyration",
      "logP",
      "rmsd",
      "temperature",
      "H_bonds",
    ];
    expect(not.filter((name) => looksLikeLevel(column(name)))).toEqual([]);
    expect(looksLikeLevel(column("strain", "kJ/mol"))).toBe(true);
    expect(looksLikeLevel(column("nu1", "cm-1"))).toBe(false);
  });
});

describe("the list of columns", () => {
  const of = (name: string, quantity: string | null, atom: number | null) =>
    ({ ...column(name, "ppm"), quantity, atom, rule: "linear", origin: "the table a.csv" }) as ColumnView;

  it("folds a quantity of many atoms, and nothing else", () => {
    const shifts = [1, 2, 3, 4, 5].map((atom) => of(`shift C${atom}`, "shift", atom));
    const charges = [1, 2, 3].map((atom) => of(`charge ${atom}`, "charge", atom));
    const groups = groupColumns([of("a", null, null), ...shifts.slice(0, 2), ...charges, ...shifts.slice(2)]);
    expect(groups.map((group) => group.length)).toEqual([1, 5, 1, 1, 1]);
    expect(groups[1]!.map(({ atom }) => atom)).toEqual([1, 2, 3, 4, 5]);
  });
});
