import { describe, expect, it } from "vitest";
import { ATOMIC_WEIGHTS, atomName, COVALENT_RADII, parseElement, SYMBOLS, symbolOf } from "./elements.ts";

describe("tables", () => {
  it("name 118 elements, each once, with tables of the same length", () => {
    expect(SYMBOLS).toHaveLength(119);
    expect(new Set(SYMBOLS).size).toBe(119);
    expect(COVALENT_RADII).toHaveLength(119);
    expect(ATOMIC_WEIGHTS).toHaveLength(119);
  });

  // Dalton Trans. 2008, 2832, as listed in a general library's table (ASE, ase/data).
  it.each([
    ["H", 0.31],
    ["B", 0.84],
    ["C", 0.76],
    ["N", 0.71],
    ["O", 0.66],
    ["F", 0.57],
    ["Si", 1.11],
    ["P", 1.07],
    ["S", 1.05],
    ["Cl", 1.02],
    ["Fe", 1.32],
    ["Se", 1.2],
    ["Br", 1.2],
    ["Pd", 1.39],
    ["I", 1.39],
    ["Cs", 2.44],
    ["Gd", 1.96],
    ["Lu", 1.87],
    ["Hf", 1.75],
    ["Pt", 1.36],
    ["Hg", 1.32],
    ["Rn", 1.5],
    ["U", 1.96],
    ["Cm", 1.69],
  ])("the covalent radius of %s is %f Å", (symbol, radius) => {
    expect(COVALENT_RADII[SYMBOLS.indexOf(symbol)]).toBe(radius);
  });

  // Pure Appl. Chem. 2016, 88, 265.
  it.each([
    ["H", 1.008],
    ["C", 12.011],
    ["S", 32.06],
    ["Cl", 35.45],
    ["Br", 79.904],
    ["I", 126.90447],
    ["U", 238.02891],
  ])("the standard atomic weight of %s is %f", (symbol, weight) => {
    expect(ATOMIC_WEIGHTS[SYMBOLS.indexOf(symbol)]).toBe(weight);
  });

  it("have no radius and no weight for a dummy", () => {
    expect([COVALENT_RADII[0], ATOMIC_WEIGHTS[0]]).toEqual([0, 0]);
  });

  it("name atoms from 1", () => {
    expect(atomName([6, 17], 1)).toBe("Cl2");
    expect(() => symbolOf(119)).toThrow(RangeError);
  });
});

const element = (symbol: string, form: "symbol" | "label" | "number" = "symbol", isotope = 0) => ({
  kind: "element",
  z: SYMBOLS.indexOf(symbol),
  isotope,
  form,
});

describe("parseElement", () => {
  it("reads every symbol as written", () => {
    for (let z = 1; z <= 118; z++) {
      expect(parseElement(SYMBOLS[z]!)).toEqual({ kind: "element", z, isotope: 0, form: "symbol" });
    }
  });

  it.each([
    ["c", "C"],
    ["CL", "Cl"],
    ["cl", "Cl"],
    ["BR", "Br"],
    ["SI", "Si"],
    ["SE", "Se"],
    ["FE", "Fe"],
    ["zn", "Zn"],
    [" O ", "O"],
  ])("X14: case is free in %s", (name, symbol) => {
    expect(parseElement(name)).toEqual(element(symbol));
  });

  it.each([
    ["C1", "C"],
    ["H_12", "H"],
    ["Cl2", "Cl"],
    ["CL2", "Cl"],
    ["C(ar)", "C"],
    ["C13", "C"],
    ["O2'", "O"],
    ["N.am", "N"],
    ["Ca1", "Ca"],
    ["C1A", "C"],
    ["N+", "N"],
  ])("X15: the element of the label %s is its leading letters", (name, symbol) => {
    expect(parseElement(name)).toEqual(element(symbol, "label"));
  });

  it.each([
    ["CA", "Ca", "C"],
    ["CD", "Cd", "C"],
    ["HG", "Hg", "H"],
    ["NE", "Ne", "N"],
    ["CO", "Co", "C"],
    ["HO", "Ho", "H"],
    ["HG21", "Hg", "H"],
    ["NA", "Na", "N"],
  ])("X16: %s in capitals has two readings", (name, two, one) => {
    expect(parseElement(name)).toMatchObject({
      kind: "ambiguous",
      code: "X16",
      readings: [SYMBOLS.indexOf(two), SYMBOLS.indexOf(one)],
    });
  });

  it.each([
    ["Ca", "Ca"],
    ["Co", "Co"],
    ["ca", "Ca"],
  ])("X16: %s, not all in capitals, is the element", (name, symbol) => {
    expect(parseElement(name)).toEqual(element(symbol));
  });

  it("X17: D, T, 2H and 13C are isotopes", () => {
    expect(parseElement("D")).toEqual(element("H", "symbol", 2));
    expect(parseElement("T")).toEqual(element("H", "symbol", 3));
    expect(parseElement("2H")).toEqual(element("H", "symbol", 2));
    expect(parseElement("13C")).toEqual(element("C", "symbol", 13));
    expect(parseElement("37CL")).toEqual(element("Cl", "symbol", 37));
    expect(parseElement("D4")).toEqual(element("H", "label", 2));
  });

  it("X18: atomic numbers from 1 to 118", () => {
    expect(parseElement("6")).toEqual(element("C", "number"));
    expect(parseElement("118")).toEqual(element("Og", "number"));
    for (const name of ["0", "119", "600"]) {
      expect(parseElement(name)).toMatchObject({ kind: "unknown", code: "X18" });
    }
  });

  it.each(["X", "Xx", "XX", "X1", "Bq", "bq2", "*", "Du", "@H", "@C1", "Gh(C)", "H-Bq"])(
    "X19: %s is a dummy",
    (name) => {
      expect(parseElement(name)).toEqual({ kind: "dummy" });
    },
  );

  it.each(["Q", "A", "HA", "CB", "HN1", "Xyz", "", "1.5", "-1", "2HG", "1HB", "14H", "Gh", "é", "Carbon"])(
    "X20: “%s” is no element",
    (name) => {
      expect(parseElement(name)).toMatchObject({ kind: "unknown", code: "X20" });
    },
  );

  it("xenon is no dummy", () => {
    expect(parseElement("Xe")).toEqual(element("Xe"));
  });
});
