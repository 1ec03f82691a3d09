import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { DomainError } from "~/lib/errors";
import { kcalPer } from "~/lib/units";
import { type FormulaInput, readFormula } from "./expression";

const column = (name: string, unit: string | null, more: Partial<FormulaInput> = {}): FormulaInput => ({
  id: `id-${name}`,
  name,
  kind: "property",
  unit,
  energyKind: null,
  temperature: null,
  ...more,
});
const energy = (
  name: string,
  unit: string,
  energyKind: FormulaInput["energyKind"] = "electronic",
  temperature: number | null = null,
) => column(name, unit, { kind: "energy", energyKind, temperature });

const COLUMNS = [
  energy("E_high", "hartree"),
  energy("G_low", "kcal/mol", "free", 298.15),
  energy("E_low", "kcal/mol"),
  energy("HF/def2-SVP", "kJ/mol"),
  column("rg", "Å"),
  column("d", "nm"),
  column("mu", "debye"),
  column("odd", "furlong"),
  column("n", null),
];

function values(text: string, numbers: Record<string, number | null>) {
  const formula = readFormula(text, COLUMNS);
  const data = new Map(
    Object.entries(numbers).map(([name, value]) => [
      `id-${name}`,
      { values: Float64Array.of(value ?? 0), present: Uint8Array.of(value === null ? 0 : 1) },
    ]),
  );
  const { values: made, present } = formula.compute(data, 1);
  return present[0] === 1 ? made[0] : null;
}

const refusal = (text: string): string => {
  try {
    readFormula(text, COLUMNS);
  } catch (error) {
    if (error instanceof DomainError) return error.message;
    throw error;
  }
  return "";
};

describe("a formula over columns", () => {
  it("adds a thermal term to an energy in another unit, in the unit of the first", () => {
    const formula = readFormula("E_high + (G_low - E_low)", COLUMNS);
    expect(formula).toMatchObject({
      kind: "energy",
      unit: "hartree",
      energyKind: "free",
      temperature: 298.15,
    });
    expect(formula.inputs.map(({ name }) => name)).toEqual(["E_high", "G_low", "E_low"]);
    const made = values("E_high + (G_low - E_low)", { E_high: -100.5, G_low: 3, E_low: 1 });
    expect(made).toBeCloseTo(-100.5 + 2 / kcalPer("hartree"), 12);
  });

  it("takes names with any signs in quotes, and numbers", () => {
    expect(values('"HF/def2-SVP" * 2 - 4 * "HF/def2-SVP" / 8', { "HF/def2-SVP": 10 })).toBeCloseTo(15, 12);
    expect(values("-(E_low) − 2×E_low", { E_low: 1 })).toBe(-3);
  });

  it("converts lengths, and makes plain numbers of ratios", () => {
    expect(values("rg + d", { rg: 1, d: 1 })).toBeCloseTo(11, 12);
    expect(values("d + rg", { rg: 1, d: 1 })).toBeCloseTo(1.1, 12);
    expect(values("rg / d", { rg: 5, d: 1 })).toBeCloseTo(0.5, 12);
    expect(readFormula("rg / d", COLUMNS)).toMatchObject({ kind: "property", unit: null });
    expect(readFormula("mu * rg", COLUMNS).unit).toBe("debye Å");
    expect(values("2 * n + 1", { n: 3 })).toBe(7);
  });

  it("has no value where an input has none, and where the result is no number", () => {
    expect(values("E_low + G_low", { E_low: 1, G_low: null })).toBeNull();
    expect(values("rg / n", { rg: 1, n: 0 })).toBeNull();
  });

  it("refuses what measures different things", () => {
    expect(refusal("E_low + rg")).toContain("kcal/mol and Å cannot be added");
    expect(refusal("E_low + 3")).toContain("a plain number");
    expect(refusal("odd + 1")).toContain("furlong");
    expect(refusal("mu + rg")).toContain("cannot be added");
  });

  it("remarks on inputs of different temperatures", () => {
    const more = [...COLUMNS, energy("G_hot", "kcal/mol", "free", 350)];
    expect(readFormula("G_low - G_hot", more)).toMatchObject({
      temperature: null,
      remarks: [expect.stringContaining("350 K")],
    });
  });

  it.each([
    "f(E_low)",
    "import(E_low)",
    "E_low ^ 2",
    "E_low.constructor",
    "[E_low]",
    "{a: E_low}",
    "x = E_low",
    "E_low; E_low",
    "E_low ? 1 : 2",
    "2 E_low",
    "E_low!",
    "E_low > 1",
    "'E_low'",
    "E_low[1]",
    "nothing + 1",
    "1 + 1",
    "",
    "(E_low",
    "E_low +",
    '"E_low',
    "pi * E_low",
    "true",
    "1e999 * E_low",
    `${"(".repeat(60)}E_low${")".repeat(60)}`,
    Array.from({ length: 200 }, () => "E_low").join("+"),
  ])("refuses %s", (text) => {
    expect(refusal(text)).not.toBe("");
  });

  it("never does anything but read or refuse, whatever is written", () => {
    const piece = fc.constantFrom(
      "E_low",
      "rg",
      '"HF/def2-SVP"',
      "(",
      ")",
      "+",
      "-",
      "*",
      "/",
      "^",
      "1",
      ".5",
      "e",
      "=",
      ";",
      "[",
      "]",
      "f",
      " ",
      "\n",
      "\u0000",
      "'",
      '"',
      "%",
      "constructor",
      "this",
      ",",
    );
    fc.assert(
      fc.property(fc.array(piece, { maxLength: 24 }), (pieces) => {
        const text = pieces.join("");
        try {
          const formula = readFormula(text, COLUMNS);
          expect(formula.inputs.length).toBeGreaterThan(0);
        } catch (error) {
          expect(error).toBeInstanceOf(DomainError);
        }
      }),
      { seed: 7, numRuns: 600 },
    );
  });
});

describe("what a formula says", () => {
  it("quotes what was written, not the symbols that stand for it", () => {
    expect(refusal('import("mu")')).toContain('import("mu")');
    expect(refusal('"mu" "n"')).not.toMatch(/q\d/);
  });

  it("squares a unit and keeps quotients together", () => {
    expect(readFormula("E_low * E_low", COLUMNS).unit).toMatch(/²$/);
    expect(readFormula("mu * mu", COLUMNS).unit).toBe("debye²");
  });

  it("tells a division by zero from missing columns", () => {
    const formula = readFormula("mu / n", COLUMNS);
    const one = (value: number) => ({ values: Float64Array.of(value, 1), present: Uint8Array.of(1, 0) });
    const data = new Map([
      ["id-mu", one(3)],
      ["id-n", one(0)],
    ]);
    expect(formula.inputsIn(data, 2)).toEqual({ having: 1, byZero: 1 });
  });
});
