import { readFileSync } from "node:fs";
import fc from "fast-check";
import { Molecule } from "openchemlib";
import { describe, expect, test } from "vitest";
import { molecule as embedded } from "../../../tests/factories/molecule.ts";
import { readXyz } from "../../../tests/factories/read-xyz.ts";
import { fixtures } from "../../../tests/factories/reference.ts";
import { perceiveBonds } from "../chem/bonds.ts";
import { boundUnit, classify } from "../intake/energy-words.ts";
import { scanFields } from "../intake/field-energies.ts";
import { siftRecipeSchema } from "../recipe/recipe.ts";
import type { SdfFrame } from "../sdf/frame.ts";
import { bondOrders } from "../sdf/orders.ts";
import { SdfReader } from "../sdf.server.ts";
import { type Graph, makeGraph } from "../structure.ts";
import { ENERGY_UNITS } from "../units.ts";
import type { ExportConformer, ExportSet } from "./export-set.ts";
import { molBlockWriter } from "./mol-block.ts";
import { writeSdf } from "./sdf-writer.ts";

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
      { name: "b.xyz", sha256: "0b".repeat(32), firstFrame: 11, frames: 990 },
    ],
    level: { name: "MMFF94", unit: "kcal/mol", energyKind: "electronic" },
    recipe,
    temperature: 298.15,
    weights: "copies",
    conformers,
    ...over,
  };
}

const WATER = [0, 0, 0.1173, 0, 0.7572, -0.4692, 0, -0.7572, -0.4692];
const WATER_BONDS = bonded([8, 1, 1], [0, 1, 0, 2]);

function bonded(elements: number[], bonds: number[]) {
  const graph = makeGraph(Uint8Array.from(elements), bonds);
  return { bonds: graph.bonds, orders: bondOrders(graph, null) };
}

/** Frames of a text that must read without hold, and with no remarks but the named. */
function readBack(text: string, remarks: readonly string[] = []): SdfFrame[] {
  const reader = new SdfReader({ file: "export.sdf", limits: { atoms: 5000 } });
  const frames = [...reader.push(new TextEncoder().encode(text)), ...reader.end()];
  expect(frames.map((frame) => frame.problem)).toEqual(frames.map(() => null));
  const codes = frames.flatMap((frame) => frame.remarks.map((remark) => remark.code));
  expect([reader.messages, codes]).toEqual([[], remarks]);
  return frames;
}

const written = (set: ExportSet, bonds = WATER_BONDS, positions: ArrayLike<number> = WATER) =>
  [...writeSdf(set, bonds, () => positions)].join("");

describe("SDF reads back", () => {
  test("any doubles, to the last bit", () => {
    const double = fc.oneof(
      fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e6, max: 1e6 }),
      fc.integer({ min: -99_999, max: 999_999 }).map((x) => x / 1e4),
      fc.constantFrom(0, -0, 1e-5, -1e-9, 5e-324, 0.00005, 99999.99995, -9999.99995),
    );
    const noBonds = bonded([2, 10], []);
    fc.assert(
      fc.property(fc.array(double, { minLength: 6, maxLength: 6 }), (positions) => {
        const set = setOf([conformer(1, { energy: positions[0]! })], { elements: [2, 10] });
        const [frame] = readBack(written(set, noBonds, positions));
        expect([...frame!.positions]).toEqual(positions);
        expect(frame!.fields.get("ENERGY_KCAL_MOL")?.map(Number)).toEqual([positions[0]]);
        expect([...frame!.fields.keys()]).not.toContain("COORDINATES_ANGSTROM");
      }),
      { seed: 71, numRuns: 1000 },
    );
  });

  test("any label of one line", () => {
    const text = fc.string({ unit: "grapheme", minLength: 1, maxLength: 30 });
    const spicy = fc.string({ unit: fc.constantFrom(..."ab $>< \"'MEND\\é\t"), minLength: 1, maxLength: 20 });
    const marks = fc.constantFrom("$$$$", "$RXN", "M  END", "> <A>", "  3  2", "");
    fc.assert(
      fc.property(fc.oneof(text, spicy, marks), (label) => {
        fc.pre(!/[\p{Cc}\p{Cf}\p{Co}\p{Cs}\p{Zl}\p{Zp}]/u.test(label));
        const frames = readBack(written(setOf([conformer(3, { label }), conformer(4)])));
        expect(frames.map((frame) => frame.label)).toEqual([label.trim() || null, "conf 4"]);
      }),
      { seed: 72, numRuns: 1000 },
    );
  });

  test("line breaks in labels and levels become blanks", () => {
    const level = { name: ">\u2028<A>\n\n$$$$", unit: "kcal/mol", energyKind: "electronic" } as const;
    const [frame] = readBack(written(setOf([conformer(3, { label: "a\r\nb" })], { level })));
    expect(frame?.label).toBe("a b");
    expect(frame?.fields.get("LEVEL")).toEqual([" > <A> $$$$"]);
  });

  test("isotopes, atom names and dummies", () => {
    const set = setOf([conformer(2), conformer(12)], {
      elements: [6, 1, 1, 0, 17],
      isotopes: [13, 2, 0, 0, 0],
      atomLabels: ["C(ar)", null, "H_12", "Bq", null],
    });
    const positions = [0, 0, 0, 1.1, 0, 0, -0.4, 1, 0, 5, 5, 5, -0.6, -1.6, 0.1];
    const frames = readBack(written(set, bonded([6, 1, 1, 0, 17], [0, 1, 0, 2, 0, 4]), positions), [
      "X19",
      "X19",
    ]);
    expect(frames).toHaveLength(2);
    expect([...frames[0]!.elements]).toEqual(set.elements);
    expect([...frames[0]!.isotopes!]).toEqual(set.isotopes);
    expect(frames[0]!.labels).toEqual(set.atomLabels);
  });

  test("four decimals need no field of their own; more do, and only then", () => {
    expect(written(setOf([conformer(1)]))).not.toContain("COORDINATES");
    const finer = WATER.map((x, k) => (k === 4 ? 0.757201 : x));
    expect(written(setOf([conformer(1)]), WATER_BONDS, finer)).toContain("\n0 0.757201 -0.4692\n");
  });

  test("own columns with their units; one that repeats a tag gets a number", () => {
    const columns = [
      { name: "Rg", unit: "Å", values: [3.25, null] },
      { name: "FRAME", unit: null, values: [7, 8] },
      { name: "COORDINATES_ANGSTROM", unit: null, values: [1, 2] },
      { name: "a<b>\n", unit: null, values: [-1e-7, 2] },
    ];
    const text = [...writeSdf(setOf([conformer(1), conformer(2)]), WATER_BONDS, () => WATER, columns)].join(
      "",
    );
    const reader = new SdfReader({ file: "a.sdf" });
    const frames = [...reader.push(new TextEncoder().encode(text)), ...reader.end()];
    expect(frames[0]!.fields.get("Rg [Å]")).toEqual(["3.25"]);
    expect(frames[0]!.fields.get("FRAME")).toEqual(["1"]);
    expect(frames[0]!.fields.get("FRAME (2)")).toEqual(["7"]);
    expect(frames[0]!.fields.get("COORDINATES_ANGSTROM (2)")).toEqual(["1"]);
    expect(frames[0]!.fields.get("a_b_")).toEqual(["-1e-7"]);
    expect(frames[1]!.fields.has("Rg [Å]")).toBe(false);
    const short = [{ name: "a", unit: null, values: [] }];
    expect(() => [...writeSdf(setOf([conformer(1)]), WATER_BONDS, () => WATER, short)]).toThrow(RangeError);
  });

  test("coordinates of another number of atoms are refused", () => {
    expect(() => written(setOf([conformer(1)]), WATER_BONDS, [1, 2, 3])).toThrow(RangeError);
  });
});

describe("the energy is the only number that names one", () => {
  test.each(ENERGY_UNITS)("in %s", (unit) => {
    const level = { name: "MMFF94", unit, energyKind: "electronic" };
    const [frame] = readBack(written(setOf([conformer(12)], { level })));
    const scanned = scanFields(frame!.fields);
    const energies = scanned.numbers.filter((number) => classify(number) === "energy");
    expect(energies.map((number) => [number.value, boundUnit(number, scanned)])).toEqual([
      [-12.5 + 12 / 7, unit],
    ]);
    expect(frame!.fields.get("LEVEL")).toEqual(["MMFF94"]);
    expect(frame!.fields.get("SOURCE_FRAME")).toEqual(["2"]);
    expect(frame!.fields.get("SOURCE_SHA256")).toEqual(["0b".repeat(32)]);
    expect(frame!.fields.get("BOND_ORDERS")).toEqual(["perceived by valence"]);
  });

  test("a set without energies has none", () => {
    const none = { energy: null, relativeEnergy: null, population: null };
    const [frame] = readBack(written(setOf([conformer(1, none)], { level: null })));
    const names = [...frame!.fields.keys()];
    expect(names).toEqual([
      "DEGENERACY",
      "SYMMETRY_NUMBER",
      "COPIES",
      "FOUND",
      "FRAME",
      "SOURCE_FRAME",
      "SOURCE_SHA256",
      "BOND_ORDERS",
    ]);
  });
});

/** Writes one block of a SMILES with rough coordinates, its orders perceived. */
function blockOf(smiles: string) {
  const { graph, positions } = embedded(smiles);
  const block = writeBlock(graph, positions);
  return { graph, block };
}

function writeBlock(graph: Graph, positions: ArrayLike<number>, stated = bondOrders(graph, null)) {
  const { elements, isotopes, bonds } = graph;
  return molBlockWriter({ elements, isotopes, labels: null, bonds, orders: stated })("a", positions);
}

/** Canonical code with configuration, hydrogens made explicit or not, as openchemlib reads it. */
function codeOf(molecule: Molecule): string {
  molecule.ensureHelperArrays(Molecule.cHelperCIP);
  molecule.removeExplicitHydrogens();
  return molecule.getIDCode();
}

describe("openchemlib reads the blocks as the molecules of their SMILES, configuration included", () => {
  test.each([
    "CCO",
    "C=O",
    "CC#N",
    "C[C@H](O)C(=O)O",
    "C[C@@H](O)C(=O)O",
    "CC(=O)N[C@@H](C)C(=O)NC",
    "F/C=C/Cl",
    "F/C=C\\Cl",
    "C[C@H](F)[C@@H](Cl)Br",
    "CS(=O)(=O)NC",
    "C[N+](C)(C)C",
    "O=[N+]([O-])C",
    "C1=CC=CC=C1O",
    "[O-]C(=O)C",
    "FC(F)(F)Br",
  ])("%s", (smiles) => {
    const { block } = blockOf(smiles);
    expect(codeOf(Molecule.fromMolfile(block.text))).toBe(codeOf(Molecule.fromSmiles(smiles)));
  });

  test("its reading of V3000 is the same", () => {
    const { graph, positions } = embedded("C[C@H](O)C(=O)O");
    const far = positions.map((x) => x + 123_456);
    const block = writeBlock(graph, far);
    expect(block).toMatchObject({ version: "V3000", exact: true });
    expect(codeOf(Molecule.fromMolfile(block.text))).toBe(codeOf(Molecule.fromSmiles("C[C@H](O)C(=O)O")));
  });
});

describe("bonds", () => {
  const { graph, positions } = embedded("OC(=O)C#N");

  test("carry the file's orders where they fit, and its charges", () => {
    const read = readRecord(writeBlock(graph, positions).text);
    expect([...read.bonds]).toEqual([...graph.bonds]);
    const again = bondOrders(graph, read);
    expect(again.origin).toBe("file");
    expect(Array.from(again.orders)).toEqual(Array.from(bondOrders(graph, null).orders));
  });

  test("are perceived where the file's table is another, and single where that fails too", () => {
    const read = readRecord(writeBlock(graph, positions).text);
    const fewer = { ...read, bonds: read.bonds.slice(2), orders: read.orders!.slice(1) };
    expect(bondOrders(graph, fewer).origin).toBe("perceived");
    expect(bondOrders(graph, { ...read, orders: null }).origin).toBe("perceived");
    const more = {
      ...read,
      bonds: Int32Array.of(...read.bonds, 7, 8),
      orders: Uint8Array.of(...read.orders!, 10),
    };
    expect(bondOrders(graph, more).origin).toBe("file");
    const methyl = makeGraph(Uint8Array.of(6, 1, 1, 1), [0, 1, 0, 2, 0, 3]);
    expect(bondOrders(methyl, null)).toMatchObject({ origin: "unknown", charges: null });
  });

  test("that leave a valence open state it, so that no reader adds hydrogens", () => {
    const methyl = makeGraph(Uint8Array.of(6, 1, 1, 1), [0, 1, 0, 2, 0, 3]);
    const flat = [0, 0, 0.1, 1.08, 0, 0, -0.54, 0.9353, 0, -0.54, -0.9353, 0];
    const block = writeBlock(methyl, flat);
    expect(block.text).toContain("    0.0000    0.0000    0.1000 C   0  0  0  0  0  3  0");
    expect(readRecord(block.text).elements).toHaveLength(4);
    const molecule = Molecule.fromMolfile(block.text);
    expect(molecule.getImplicitHydrogens(0)).toBe(0);
    const bare = writeBlock(makeGraph(Uint8Array.of(8), []), [0, 0, 1]);
    expect(bare.text).toContain(" O   0  0  0  0  0 15  0");
  });

  test("with radicals and charges of the file keep them", () => {
    const ion = makeGraph(Uint8Array.of(8, 1, 1), [0, 1, 0, 2]);
    const stated = { bonds: ion.bonds, orders: [1, 1], charges: [1, 0, 0], radicals: [2, 0, 0] };
    for (const shift of [0, 200_000]) {
      const block = writeBlock(
        ion,
        WATER.map((x) => x + shift),
        bondOrders(ion, stated),
      );
      const read = readRecord(block.text);
      expect([read.charge, read.multiplicity, block.version]).toEqual([
        1,
        2,
        shift === 0 ? "V2000" : "V3000",
      ]);
    }
  });
});

function readRecord(block: string): SdfFrame {
  return readBack(`${block}$$$$\n`)[0]!;
}

describe("large molecules are V3000", () => {
  /** A chain of carbons, far enough apart to be no matter of bonds; hydrogens do not count here. */
  const chain = (atoms: number, closed: boolean) => {
    const bonds = Array.from({ length: atoms - 1 }, (_, k) => [k, k + 1]).flat();
    const graph = makeGraph(new Uint8Array(atoms).fill(6), closed ? [...bonds, 0, atoms - 1] : bonds);
    const positions = Float64Array.from({ length: 3 * atoms }, (_, k) => Math.sqrt(2 + k) * (k % 2 ? -1 : 1));
    return { graph, positions };
  };

  test.each([
    [999, false, "V2000"],
    [1000, false, "V3000"],
    [999, true, "V2000"],
  ] as const)("%i carbons, closed %s: %s", (atoms, closed, version) => {
    const { graph, positions } = chain(atoms, closed);
    const set = setOf([conformer(1)], { elements: graph.elements });
    const orders = bondOrders(graph, null);
    const text = written(set, { bonds: graph.bonds, orders }, positions);
    expect(text.split("\n")[3]?.slice(34)).toBe(version);
    const [frame] = readBack(text);
    expect([...frame!.positions]).toEqual([...positions]);
    expect([...frame!.bonds]).toEqual([...graph.bonds]);
    expect(text.split("\n").every((line) => line.length <= 80)).toBe(true);
  });

  test("1000 bonds of fewer atoms too", () => {
    const { graph, positions } = chain(999, true);
    const crossed = makeGraph(graph.elements, [...graph.bonds, 0, 500]);
    const block = writeBlock(crossed, positions);
    expect(block.version).toBe("V3000");
    expect([...readRecord(block.text).bonds]).toEqual([...crossed.bonds]);
  });
});

test("300 conformers of N-acetylalanine N-methylamide read back, all L", () => {
  const { elements, block } = readXyz(`${fixtures}ensembles/ac-ala-nhme.xyz`);
  const graph = makeGraph(elements, perceiveBonds(elements, block.positions).bonds);
  const positionsOf = (frame: number) => block.positions.slice(66 * (frame - 1), 66 * frame);
  const all = Array.from({ length: block.count }, (_, k) => conformer(k + 1));
  const orders = bondOrders(graph, null);
  const pieces = [...writeSdf(setOf(all, { elements }), { bonds: graph.bonds, orders }, positionsOf)];
  const frames = readBack(pieces.join(""));
  expect(frames.flatMap((frame) => [...frame.positions])).toEqual([...block.positions]);
  const some = pieces.filter((_, k) => k % 30 === 0);
  const codes = new Set(some.map((text) => codeOf(Molecule.fromMolfile(text))));
  expect([...codes]).toEqual([codeOf(Molecule.fromSmiles("CC(=O)N[C@@H](C)C(=O)NC"))]);
});

test("the table of an SDF gives the orders again that it was written with", () => {
  const reader = new SdfReader({ file: "tosylamide.sdf" });
  const bytes = readFileSync(`${fixtures}ensembles/tosylamide.sdf`);
  const [frame] = [...reader.push(bytes), ...reader.end()] as [SdfFrame];
  const graph = makeGraph(frame.elements, perceiveBonds(frame.elements, frame.positions).bonds);
  const orders = bondOrders(graph, frame);
  expect(orders.origin).toBe("file");
  const block = writeBlock(graph, frame.positions, orders);
  expect(block).toMatchObject({ version: "V2000", exact: true });
  expect([...readRecord(block.text).positions]).toEqual([...frame.positions]);
  const expected = codeOf(Molecule.fromSmiles("CCCCNS(=O)(=O)c1ccc(C)cc1"));
  expect(codeOf(Molecule.fromMolfile(block.text))).toBe(expected);
});
