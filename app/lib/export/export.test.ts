import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { EnergyScan } from "../intake/energies.ts";
import { findUnit } from "../intake/energy-unit-finding.ts";
import { siftRecipeSchema } from "../recipe/recipe.ts";
import type { XyzFrame } from "../xyz/frame.ts";
import { XyzReader } from "../xyz.server.ts";
import { numberCell, textCell, unguardText, writeCsv } from "./csv.ts";
import type { ExportConformer, ExportSet } from "./export-set.ts";
import { CAUTION, writeJson } from "./json.ts";
import { writeXyz } from "./xyz-writer.ts";

const recipe = siftRecipeSchema.parse({
  version: 1,
  level: "abcdefghijklmnop",
  levelName: "MMFF94",
  window: null,
  energyTolerance: 0.15,
  rmsdTolerance: 0.2,
  atoms: "heavy+polarH",
  symmetry: true,
  mirror: "merge",
  chirality: "achiral",
  chiralityOverridden: false,
});

function conformer(frame: number, over: Partial<ExportConformer> = {}): ExportConformer {
  return {
    frame,
    label: `conf ${frame}`,
    energy: -12.5 + frame / 7,
    relativeEnergy: frame / 7,
    population: 1 / 3,
    degeneracy: 2,
    symmetryNumber: 1,
    copies: 4,
    mirrorRmsd: 0.1234567890123,
    found: 9,
    ...over,
  };
}

function setOf(conformers: readonly ExportConformer[], over: Partial<ExportSet> = {}): ExportSet {
  return {
    ensemble: { id: "abcdefghijklmnop", name: "Test", formula: "H2O" },
    elements: [8, 1, 1],
    isotopes: null,
    atomLabels: null,
    sources: [
      { name: "a.xyz", sha256: "0a".repeat(32), firstFrame: 1, frames: 10 },
      { name: "b.xyz", sha256: "0b".repeat(32), firstFrame: 11, frames: 90 },
    ],
    level: { name: "MMFF94", unit: "kcal/mol", energyKind: "electronic" },
    recipe,
    temperature: 298.15,
    weights: "copies",
    conformers,
    ...over,
  };
}

const BONDS = [0, 1, 0, 2];
const WATER = [0, 0, 0.1173, 0, 0.7572, -0.4692, 0, -0.7572, -0.4692];

function readBack(text: string, remarks: readonly string[] = []): XyzFrame[] {
  const reader = new XyzReader({ file: "export.xyz" });
  const frames = [...reader.push(new TextEncoder().encode(text)), ...reader.end()];
  const codes = frames.flatMap((frame) => frame.remarks.map((remark) => remark.code));
  expect([reader.messages, codes]).toEqual([[], remarks]);
  return frames;
}

/** RFC 4180 read strictly, for the checks. */
function parseCsv(text: string): string[][] {
  const rows: string[][] = [[]];
  const cell = /("(?:[^"]|"")*"|[^",\r\n]*)(,|\r\n)/y;
  while (cell.lastIndex < text.length) {
    const match = cell.exec(text);
    if (!match) throw new Error("not RFC 4180");
    const [, written = "", end] = match;
    rows.at(-1)?.push(written.startsWith('"') ? written.slice(1, -1).replaceAll('""', '"') : written);
    if (end === "\r\n") rows.push([]);
  }
  return rows.slice(0, -1);
}

describe("XYZ reads back", () => {
  test("any double, to the last bit (F13)", () => {
    const double = fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e6, max: 1e6 });
    fc.assert(
      fc.property(fc.array(double, { minLength: 6, maxLength: 6 }), ([a, b, c, d, e, f]) => {
        // Two atoms: distances are not looked at, so that any numbers will do.
        const positions = [a!, b!, c!, d!, e!, f!];
        const set = setOf([conformer(1, { energy: a!, label: null })], { elements: [2, 10] });
        const frames = readBack([...writeXyz(set, () => positions)].join(""));
        expect([...frames[0]!.positions]).toEqual(positions);
        expect(frames[0]!.keys.get("energy")?.value).toEqual(a);
      }),
      { seed: 51, numRuns: 500 },
    );
  });

  test("any label", () => {
    const text = fc.string({ unit: "grapheme", minLength: 1, maxLength: 30 });
    const spicy = fc.string({ unit: fc.constantFrom(..."ab \"'\\\n[]{}=,:é"), minLength: 1, maxLength: 20 });
    fc.assert(
      fc.property(fc.oneof(text, spicy), (written) => {
        const label = written.trim();
        fc.pre(label !== "" && !/[\p{C}\p{Zl}\p{Zp}]/u.test(label.replaceAll("\n", "")));
        const text = [...writeXyz(setOf([conformer(3, { label })]), () => WATER)].join("");
        const [frame] = readBack(text, label.includes("\n") ? ["G13"] : []);
        expect(frame?.label).toBe(label);
      }),
      { seed: 52, numRuns: 1000 },
    );
  });

  test("isotopes, atom names and dummies", () => {
    const set = setOf([conformer(2), conformer(12)], {
      elements: [6, 1, 1, 0, 17],
      isotopes: [13, 2, 0, 0, 0],
      atomLabels: ["C(ar)", null, "H_12", "Bq", null],
    });
    const positions = [0, 0, 0, 1.1, 0, 0, -0.4, 1, 0, 5, 5, 5, -0.6, -1.6, 0];
    const frames = readBack([...writeXyz(set, () => positions)].join(""), ["X19", "X19"]);
    expect(frames).toHaveLength(2);
    expect([...frames[0]!.elements]).toEqual(set.elements);
    expect([...frames[0]!.isotopes!]).toEqual(set.isotopes);
    expect(frames[0]!.labels).toEqual(set.atomLabels);
  });

  test("energy with its unit is found without asking, the source stands beside", () => {
    const frames = readBack([...writeXyz(setOf([conformer(2), conformer(12)]), () => WATER)].join(""));
    const scan = new EnergyScan();
    for (const frame of frames) scan.add(frame, frame.comment);
    const { verdict, chosen } = scan.finish();
    expect([verdict, chosen?.from]).toEqual(["lone", "key:energy"]);
    expect(findUnit(chosen!, [8, 1, 1])).toMatchObject({ unit: "kcal/mol", evidence: "bound" });
    expect([...chosen!.column.values]).toEqual([-12.5 + 2 / 7, -12.5 + 12 / 7]);
    const second = frames[1]!.keys;
    expect(["frame", "source_frame", "source_sha256", "level"].map((key) => second.get(key)?.value)).toEqual([
      12,
      2,
      "0b".repeat(32),
      "MMFF94",
    ]);
  });

  test("coordinates of another number of atoms are refused", () => {
    expect(() => [...writeXyz(setOf([conformer(1)]), () => [1, 2, 3])]).toThrow(RangeError);
  });
});

describe("CSV", () => {
  test("has the fixed header, then columns with their units, CRLF, and no comment lines", () => {
    const set = setOf([
      conformer(1),
      conformer(2, {
        label: null,
        relativeEnergy: null,
        population: null,
        symmetryNumber: null,
        copies: null,
      }),
    ]);
    const columns = [
      { name: "Rg", unit: "Å", values: [3.25, null] },
      { name: "count", unit: null, values: [-1e-7, 2] },
    ];
    const text = [...writeCsv(set, columns)].join("");
    expect(text.split("\r\n")[0]).toBe(
      "frame,label,relativeEnergy,degeneracy,symmetryNumber,copies,found,population,Rg [Å],count",
    );
    expect(parseCsv(text).slice(1)).toEqual([
      ["1", "conf 1", String(1 / 7), "2", "1", "4", "9", String(1 / 3), "3.25", "-1e-7"],
      ["2", "", "", "2", "", "", "9", "", "", "2"],
    ]);
  });

  test("says which search found a conformer how often, where there were several", () => {
    const found = [
      { batch: 1, found: 3 },
      { batch: 2, found: 1 },
    ];
    const set = setOf([
      conformer(1, { foundIn: found }),
      conformer(2, { foundIn: [{ batch: 2, found: 1 }] }),
    ]);
    const rows = parseCsv([...writeCsv(set, [{ name: "foundIn", unit: null, values: [1, 2] }])].join(""));
    expect(rows.map((row) => row.slice(-2))).toEqual([
      ["foundIn", "foundIn (2)"],
      ["1", "batch 1: 3; batch 2: 1"],
      ["2", "batch 2: 1"],
    ]);
  });

  test("any text reads back, and none begins as a formula (security E08)", () => {
    const spicy = fc.string({ unit: fc.constantFrom(..."=+-@\t\r\n\0'\",;a1 "), maxLength: 12 });
    fc.assert(
      fc.property(fc.oneof(spicy, fc.string({ unit: "binary", maxLength: 20 })), (label) => {
        const text = [...writeCsv(setOf([conformer(1, { label })]), [])].join("");
        const cell = parseCsv(text)[1]![1]!;
        expect(unguardText(cell)).toBe(label);
        expect(cell).not.toMatch(/^[=+\-@\t\r\n\0]/);
      }),
      { seed: 53, numRuns: 2000 },
    );
  });

  test("names of columns are text too", () => {
    const [header] = writeCsv(setOf([conformer(1)]), [
      { name: '=HYPERLINK("x","y")', unit: null, values: [1] },
    ]);
    expect(parseCsv(header!)[0]!.at(-1)).toBe('\'=HYPERLINK("x","y")');
  });

  test("no two columns have the same name", () => {
    const named = (name: string) => ({ name, unit: null, values: [1] });
    const [header] = writeCsv(setOf([conformer(1)]), [
      named("frame"),
      named("x"),
      named("x"),
      named("x (2)"),
    ]);
    expect(parseCsv(header!)[0]!.slice(8)).toEqual(["frame (2)", "x", "x (3)", "x (2)"]);
  });

  test("numbers are bare, negative ones too, and exact (security E08)", () => {
    expect([-1.5, 0.1 + 0.2, 1e21, null, Number.NaN].map(numberCell)).toEqual([
      "-1.5",
      "0.30000000000000004",
      "1e+21",
      "",
      "",
    ]);
    expect(textCell("-1.5")).toBe("'-1.5");
  });

  test("a column of another length is refused", () => {
    expect(() => [...writeCsv(setOf([conformer(1)]), [{ name: "a", unit: null, values: [] }])]).toThrow(
      RangeError,
    );
  });
});

describe("JSON", () => {
  test("carries schema version, recipe, units, checksums, constants, caution and every conformer", () => {
    const set = setOf([conformer(1), conformer(12, { upperBound: true })]);
    const parsed: unknown = JSON.parse([...writeJson(set, BONDS, () => WATER, [])].join(""));
    expect(parsed).toMatchObject({
      schema: "lowlying-distinct-set",
      schemaVersion: 3,
      caution: CAUTION,
      constants: "CODATA 2022",
      units: { energy: "kcal/mol", relativeEnergy: "kcal/mol", population: "fraction" },
      recipe,
      sources: set.sources,
      temperature: 298.15,
      weights: "copies",
      conformers: [
        { ...conformer(1), source: "0a".repeat(32) },
        { ...conformer(12), upperBound: true, source: "0b".repeat(32) },
      ],
    });
  });

  test("gives energies in kcal/mol, and the number of the source beside them in its own unit", () => {
    const set = setOf([conformer(1, { energy: -2 })], {
      level: { name: "G", unit: "kJ/mol", energyKind: "free" },
    });
    expect(JSON.parse([...writeJson(set, BONDS, () => WATER, [])].join(""))).toMatchObject({
      units: { energy: "kcal/mol", sourceEnergy: "kJ/mol" },
      level: { unit: "kJ/mol" },
      conformers: [{ energy: -2 / 4.184, sourceEnergy: -2 }],
    });
  });

  test("reads back as structures with the values of all columns", () => {
    const dipole = { name: "dipole", unit: "D", values: [1.85, null] };
    const text = [...writeJson(setOf([conformer(1), conformer(2)]), BONDS, () => WATER, [dipole])].join("");
    expect(JSON.parse(text)).toMatchObject({
      elements: [8, 1, 1],
      // Atoms count from 1 for whoever reads it.
      bonds: [
        [1, 2],
        [1, 3],
      ],
      columns: [{ name: "dipole", unit: "D" }],
      conformers: [
        {
          values: [1.85],
          positions: [
            [0, 0, 0.1173],
            [0, 0.7572, -0.4692],
            [0, -0.7572, -0.4692],
          ],
        },
        { values: [null] },
      ],
    });
  });

  test("is valid without conformers", () => {
    expect(JSON.parse([...writeJson(setOf([]), BONDS, () => WATER, [])].join(""))).toMatchObject({
      conformers: [],
    });
  });
});
