import { describe, expect, it } from "vitest";
import { cheapAndBetter, chooseLevels, commonPair, kindOfLevel } from "./better-level.ts";

// Which name belongs to which kind of method: common practice, no source.
describe("kindOfLevel", () => {
  it.each([
    ["MMFF94", "force field"],
    ["MMFF94s", "force field"],
    ["UFF", "force field"],
    ["GAFF", "force field"],
    ["AMBER ff14SB", "force field"],
    ["OPLS-AA", "force field"],
    ["PM3", "semi-empirical"],
    ["PM6-D3H4", "semi-empirical"],
    ["PM7", "semi-empirical"],
    ["am1", "semi-empirical"],
    ["HF/6-31G(d)", "Hartree-Fock"],
    ["RHF/STO-3G", "Hartree-Fock"],
    ["B3LYP/6-31G(d)", "density functional"],
    ["PBE0-D3/def2-TZVP", "density functional"],
    ["PBE", "density functional"],
    ["B2PLYP", "density functional"],
    ["ωB97X-D", "density functional"],
    ["MP2/cc-pVTZ", "second-order perturbation"],
    ["RI-MP2", "second-order perturbation"],
    ["CCSD(T)/CBS", "coupled cluster"],
    ["W1h", "coupled cluster"],
    ["CBS", "coupled cluster"],
    ["MP2/CBS", "second-order perturbation"],
    ["B3LYP//MP2", "density functional"],
    ["CCSD(T)/CBS//MP2/cc-pVTZ", "coupled cluster"],
    ["published", "reference"],
    ["Reference energies", "reference"],
    ["ref", "reference"],
    ["experiment", "reference"],
  ])("takes %s as %s", (name, kind) => expect(kindOfLevel(name)).toBe(kind));

  it.each(["level 2", "cheap", "mine", "", "huffington", "AM12", "compound PM"])("does not know %s", (name) =>
    expect(kindOfLevel(name)).toBeNull(),
  );

  it("reads a long name in short time and to the same end", () => {
    expect(kindOfLevel(`${"b97-".repeat(50_000)}`)).toBe("density functional");
    expect(kindOfLevel("-".repeat(100_000))).toBeNull();
  });
});

const named = (...names: string[]) => names.map((name, k) => ({ id: `id${k}`, name }));
const names = (found: ReturnType<typeof chooseLevels<{ id: string; name: string }>>) => [
  found.level?.name,
  found.reference?.name,
];

describe("commonPair", () => {
  it("is the pair that the ensembles propose themselves, never the same data twice", () => {
    const own = named("published", "published_rel_kcal_mol", "MMFF94", "B3LYP");
    expect(commonPair([own])).toEqual(names(chooseLevels(own, { level: null, reference: null })));
    expect(commonPair([own])).toEqual(["MMFF94", "published_rel_kcal_mol"]);
  });

  it("prefers what more ensembles have", () => {
    const three = named("MMFF94", "B3LYP", "CCSD(T)");
    const two = named("MMFF94", "B3LYP");
    expect(commonPair([three, three, three, two, two])).toEqual(["MMFF94", "B3LYP"]);
    expect(commonPair([three, named("MMFF94")])).toEqual(["MMFF94", "CCSD(T)"]);
    expect(commonPair([[], named("MMFF94")])).toBeNull();
  });
});

describe("cheapAndBetter", () => {
  it("takes a column called ref as the reference, whatever came first", () => {
    expect(names(cheapAndBetter(named("ref", "cheap")))).toEqual(["cheap", "ref"]);
  });

  it("judges the cheapest by the best, whatever came first", () => {
    expect(names(cheapAndBetter(named("CCSD(T)/CBS", "MMFF94")))).toEqual(["MMFF94", "CCSD(T)/CBS"]);
    expect(names(cheapAndBetter(named("B3LYP", "MP2", "PM6", "HF")))).toEqual(["PM6", "MP2"]);
    expect(names(cheapAndBetter(named("published", "CCSD(T)")))).toEqual(["CCSD(T)", "published"]);
  });

  it("goes by arrival among equals and unknown names, the later one the reference", () => {
    expect(names(cheapAndBetter(named("UFF", "MMFF94")))).toEqual(["UFF", "MMFF94"]);
    expect(names(cheapAndBetter(named("one", "two", "three")))).toEqual(["one", "three"]);
    expect(names(cheapAndBetter(named("MP2", "mine")))).toEqual(["MP2", "mine"]);
    expect(names(cheapAndBetter(named("mine", "MP2", "UFF", "yours")))).toEqual(["UFF", "MP2"]);
  });

  it("has no reference with one level, and nothing without", () => {
    expect(names(cheapAndBetter(named("UFF")))).toEqual(["UFF", undefined]);
    expect(cheapAndBetter([])).toEqual({ level: null, reference: null });
  });
});

describe("chooseLevels", () => {
  const levels = named("CCSD(T)/CBS", "MMFF94", "B3LYP");
  it("keeps what is asked for, and takes the other side from the rest", () => {
    const asked = (level: string | null, reference: string | null) =>
      names(chooseLevels(levels, { level, reference }));
    expect(asked(null, null)).toEqual(["MMFF94", "CCSD(T)/CBS"]);
    expect(asked("id0", "id1")).toEqual(["CCSD(T)/CBS", "MMFF94"]);
    expect(asked("id2", null)).toEqual(["B3LYP", "CCSD(T)/CBS"]);
    expect(asked(null, "id2")).toEqual(["MMFF94", "B3LYP"]);
    expect(asked("gone", "lost")).toEqual(["MMFF94", "CCSD(T)/CBS"]);
  });

  it("takes what is called the reference as one, beside names that say nothing", () => {
    expect(names(cheapAndBetter(named("reference", "cheap")))).toEqual(["cheap", "reference"]);
    expect(names(cheapAndBetter(named("level 1", "published", "level 2")))).toEqual(["level 1", "published"]);
    expect(names(cheapAndBetter(named("level 1", "MMFF94")))).toEqual(["level 1", "MMFF94"]);
  });

  it("never compares a level with itself", () => {
    expect(names(chooseLevels(levels, { level: "id0", reference: "id0" }))).toEqual(["CCSD(T)/CBS", "B3LYP"]);
    expect(names(chooseLevels(levels.slice(0, 1), { level: "id0", reference: null }))).toEqual([
      "CCSD(T)/CBS",
      undefined,
    ]);
  });
});
