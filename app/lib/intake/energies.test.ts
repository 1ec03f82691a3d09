import { existsSync, readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { describe, expect, test } from "vitest";
import { DomainError } from "../errors.ts";
import { XyzReader } from "../xyz.server.ts";
import { scanComment } from "./comment-numbers.ts";
import { EnergyScan } from "./energies.ts";
import { extractEnergy, readEnergyColumn } from "./energy-column.ts";
import { energyFromQuestion, energyUnitQuestion } from "./energy-questions.ts";
import { energyRemarks } from "./energy-remarks.ts";
import { findUnit } from "./energy-unit-finding.ts";
import { suggestLevel } from "./level-name.ts";

const WATER = Uint8Array.of(8, 1, 1);

function scan(comments: readonly string[], from?: string) {
  const one = new EnergyScan({ from });
  for (const [k, comment] of comments.entries())
    one.add({ number: k + 1, file: "a.xyz", line: 5 * k + 1 }, comment);
  return one.finish();
}

/** Three frames that differ in their numbers, by a pattern with `#` for the frame's and `@` for a decimal. */
function frames(pattern: string, values: readonly string[] = ["-1.25", "-1.1", "-0.75"]): string[] {
  return values.map((value, k) => pattern.replaceAll("#", String(k + 7)).replaceAll("@", value));
}

describe("a lone energy is found in", () => {
  test.each([
    ["@", "number:1", null],
    ["energy=@", "key:energy", null],
    ["conf #  energy: @", "key:energy", null],
    ["conformer #  MMFF94  E = @ kcal/mol", "key:E", "kcal/mol"],
    ["H_gtt relative energy @ kcal/mol", "number:1", "kcal/mol"],
    ["# relative energy @ kcal/mol", "number:2", "kcal/mol"],
    ['Properties=species:S:1:pos:R:3 energy=@ name="conf_000#" pbc="F F F"', "key:energy", null],
    ['Properties=species:S:1:pos:R:3 energy=@ dipole=3.3# conformer="frame#"', "key:energy", null],
    ["i = #, time = 55#.500, E = @", "key:E", null],
    ["SCF Done:  E(RHF) =  @ A.U. after   12 cycles", "key:E(RHF)", "hartree"],
    ["Total energy (Hartree): @", "key:(Hartree)", "hartree"],
    ["E [eV] = @ step #", "key:[eV]", "eV"],
    ["energy:@eV", "key:energy", "eV"],
    ["energy in kJ/mol @", "number:1", "kJ/mol"],
    ["G = @ Eh T=298.15 K", "key:G", "hartree"],
    ["Conformer # (ΔE = @ kcal/mol, 35.# %)", "key:(ΔE", "kcal/mol"],
    ["conf_000# @", "number:1", null],
    ["# @", "number:2", null],
    ["@ a", "number:1", null],
    ["@ A", "number:1", null],
    ["@ D", "number:1", null],
    ["@ s", "number:1", null],
    ["a @ b", "number:1", null],
    ["@ water", "number:1", null],
    ["@ a.u.", "number:1", "hartree"],
    ["conf_000#: @ kcal mol^-1", "number:1", "kcal/mol"],
    ["conf #: @", "number:2", null],
    ["charge=0 mult=1 HF=@", "key:HF", null],
    ["frame # rmsd 0.1# energy @ gap 5.#", "number:3", null],
    ['energy=@ energy_unit="kJ/mol"', "key:energy", "kJ/mol"],
    ["MMFF94_ENERGY_KCAL_MOL=@ CONFORMER_NUMBER=#", "key:MMFF94_ENERGY_KCAL_MOL", "kcal/mol"],
    ["energy=@ free_energy=@", "key:energy", null],
    ["2026-03-0# 12:30:0# v1.2.3 C1 @ Eh", "number:1", "hartree"],
    ["E = \u2212@ Eh", "key:E", "hartree"],
  ])("%s", (pattern, from, unit) => {
    const values = pattern.includes("\u2212") ? ["76.25", "76.1", "75.75"] : undefined;
    const findings = scan(frames(pattern, values));
    expect([findings.verdict, findings.chosen?.from]).toEqual(["lone", from]);
    const [low, high] = values ? [-76.25, -75.75] : [-1.25, -0.75];
    expect([findings.chosen?.min, findings.chosen?.max, findings.chosen?.count]).toEqual([low, high, 3]);
    expect(findUnit(findings.chosen!, WATER).unit).toBe(unit);
  });
});

describe("no energy is found in", () => {
  test.each([
    "",
    "#",
    "conformer #",
    "time = 55#.5",
    "t = 0.#, T = 29#.15",
    "2026-03-0# 12:30:0#",
    "version 2.# of C1",
    'name="conf 1.#"',
    "dipole=1.# rmsd=0.#",
    "0.# fs",
    "12.# s",
    "1.8# D",
    "1.5# A",
    "1.5# Å",
    "29#.15 K",
    'Properties=species:S:1:pos:R:3 Lattice="10.# 0 0 0 10 0 0 0 10"',
    "homo_lumo_gap=3.# eV",
    "species:S:1:pos:R:3",
  ])("%s", (pattern) => {
    expect(scan(frames(pattern)).verdict).toBe("none");
  });
});

describe("several energies are asked, with a proposal", () => {
  test.each([
    ["E_scf=@ E_tot=1@#", "key:E_scf"],
    ["energy=@ dE=0.#", "key:energy"],
    ["@ 0.#5", "number:1"],
    ["relative energy @ kcal/mol total energy -76.# Eh", "number:2"],
  ])("%s", (pattern, proposed) => {
    const findings = scan(frames(pattern, ["1.25", "1.1", "1.75"]));
    expect([findings.verdict, findings.chosen, findings.proposed?.from]).toEqual(["several", null, proposed]);
  });

  test.each(["H @ 2.5001 3.5001", "step 1 scf=@ mp2=-1.5 dipole=2.13"])(
    "%s is never settled unasked",
    (pattern) => {
      expect(scan(frames(pattern, ["1.25", "1.1", "1.75"])).verdict).toBe("several");
    },
  );

  test("a stray number in a few frames is no rival, a name in a few frames no match", () => {
    const usual = Array.from({ length: 20 }, (_, k) => `energy=-1.${k}`);
    expect(scan([...usual, "energy=-1.5 energy_b=3.5"]).verdict).toBe("lone");
    const bare = usual.map((_, k) => `-1.${k}`);
    expect(scan([...bare, "energy=3.5", "energy=3.6", "energy=3.7"]).verdict).toBe("several");
  });
});

describe("of a key that stands twice the last value counts (X33)", () => {
  const doubled = frames("energy=0.5 energy=@");

  test("and the one before is no choice", () => {
    const { verdict, chosen, candidates } = scan(doubled);
    expect(verdict).toBe("lone");
    expect(candidates.map(({ from }) => from)).toEqual(["key:energy"]);
    expect([...(chosen?.column.values ?? [])]).toEqual([-1.25, -1.1, -0.75]);
  });

  test("be it in some frames only", () => {
    const mixed = scan([...frames("energy=@"), ...doubled, "energy=-2.5"]);
    expect(mixed.verdict).toBe("lone");
    expect(mixed.chosen?.from).toBe("key:energy");
    expect([...(mixed.chosen?.column.values ?? [])]).toEqual([-1.25, -1.1, -0.75, -1.25, -1.1, -0.75, -2.5]);
  });

  test("unless a place is named", () => {
    expect([...(scan(doubled, "number:1").chosen?.column.values ?? [])]).toEqual([0.5, 0.5, 0.5]);
  });
});

describe("the rule that names the number", () => {
  test("takes whole words only, exact in case", () => {
    const comment = "time = 5500 energy=-1.5 Energy=-2.5 E(RHF)=-3.5";
    expect(extractEnergy(comment, "key:E")).toBeNull();
    expect(extractEnergy(comment, "key:energy")).toEqual({ text: "-1.5", value: -1.5 });
    expect(extractEnergy(comment, "key:Energy")).toEqual({ text: "-2.5", value: -2.5 });
    expect(extractEnergy(comment, "key:E(RHF)")).toEqual({ text: "-3.5", value: -3.5 });
    expect(extractEnergy(comment, "key:time")).toEqual({ text: "5500", value: 5500 });
  });

  test("counts every number of the line, whole ones too, keyed ones too", () => {
    const comment = 'conf 7 energy=-1.5 at 298.15 K, MMFF94, v1.2.3, 12:30 pos="1 2 3" n=[4,5]';
    expect(scanComment(comment).numbers.map((number) => number.value)).toEqual([
      7, -1.5, 298.15, 1, 2, 3, 4, 5,
    ]);
    expect(extractEnergy(comment, "number:2")).toEqual({ text: "-1.5", value: -1.5 });
    expect(extractEnergy(comment, "number:9")).toBeNull();
  });

  test("keeps text that is no number apart from nothing at all", () => {
    expect(extractEnergy("E = -1,234.5", "key:E")).toEqual({ problem: "-1,234.5" });
    expect(extractEnergy("E = nan", "key:E")).toEqual({ problem: "nan" });
    expect(extractEnergy("no key", "key:E")).toBeNull();
  });

  test("is taken over what would be proposed, and refused where no frame has it", () => {
    const comments = frames("conf # energy=@ E2=-3.#");
    const findings = scan(comments, "number:3");
    expect([findings.verdict, findings.chosen?.from, findings.chosen?.max]).toEqual([
      "given",
      "number:3",
      -3.7,
    ]);
    expect(scan(comments, "key:E2").chosen?.min).toBe(-3.9);
    for (const from of ["key:ENERGY", "number:4", "field:energy"]) {
      expect(() => scan(comments, from)).toThrow(DomainError);
    }
    for (const from of ["energy", "key:", "number:0", "number:x", "column:3", ""]) {
      expect(() => readEnergyColumn([], from)).toThrow(/Write key:NAME, number:N or/);
    }
  });

  test("reads the same column out of stored comments", () => {
    const rows = frames("conf # E = @ Eh").map((comment, k) => ({
      frame: k + 1,
      file: "a.xyz",
      line: 5 * k + 1,
      comment,
    }));
    const findings = scan(rows.map((row) => row.comment));
    expect(readEnergyColumn(rows, "key:E")).toEqual(findings.chosen?.column);
  });
});

test("keys called __proto__ and constructor are keys (security E07)", () => {
  const findings = scan(frames("__proto__=1.# constructor=2.# energy=@"));
  expect(findings.chosen?.from).toBe("key:energy");
  expect(extractEnergy("__proto__=1.5", "key:__proto__")).toEqual({ text: "1.5", value: 1.5 });
  expect(extractEnergy("a=1", "key:constructor")).toBeNull();
});

test("held frames stay out of counts and spreads, not out of the column", () => {
  const one = new EnergyScan();
  for (const [k, value] of [-1.5, 900.5, -1.25].entries()) {
    one.add({ number: k + 1, file: "a.xyz", line: 1 }, `energy=${value}`);
  }
  const chosen = one.finish((frame) => frame !== 2).chosen!;
  expect([chosen.min, chosen.max, chosen.count, chosen.total]).toEqual([-1.5, -1.25, 2, 2]);
  expect([...chosen.column.values]).toEqual([-1.5, 900.5, -1.25]);
});

test("an energy with a decimal comma is told, not taken", () => {
  const findings = scan(["E = -76,0267 Eh", "E = -76,0251 Eh"]);
  expect(findings).toMatchObject({ verdict: "none", unreadable: { key: "E", found: "-76,0267" } });
});

describe("units", () => {
  test("words that differ are not settled", () => {
    expect(findUnit(scan(["E = 1.5 kcal/mol", "E = 2.5 kJ/mol"]).chosen!, WATER)).toMatchObject({
      unit: null,
      evidence: "mixed",
    });
    expect(findUnit(scan(["E = 1.5 kcal/mol", "E = 2.5"]).chosen!, WATER)).toEqual({
      unit: null,
      proposed: "kcal/mol",
      evidence: "mixed",
    });
  });

  test("isolated atoms speak for hartree, eV, kcal/mol or kJ/mol within 1 %", () => {
    // Formats page, row E07: O -75.1, H -0.50; 627.509474 kcal/mol and 2625.499639 kJ/mol a hartree (CODATA 2022).
    const unitOf = (value: number) =>
      findUnit(scan([`energy=${value}`, `energy=${value + 1e-4}`]).chosen!, WATER).proposed;
    expect(unitOf(-76.0267)).toBe("hartree");
    expect(unitOf(-76.0267 * 27.211386245981)).toBe("eV");
    expect(unitOf(-76.0267 * 627.509474)).toBe("kcal/mol");
    expect(unitOf(-76.0267 * 2625.499639)).toBe("kJ/mol");
    expect(unitOf(-76.1 * 1.009)).toBe("hartree");
    expect(unitOf(-76.1 * 1.011)).toBeNull();
  });

  test("eV by custom only for bare keys of extended comments, and not where it would mean too wide a spread", () => {
    const custom = (comments: string[]) => findUnit(scan(comments).chosen!, WATER);
    const extended = (value: number) => `Properties=species:S:1:pos:R:3 energy=${value}`;
    expect(custom([extended(-14.2), extended(-14.1)])).toEqual({
      unit: null,
      proposed: "eV",
      evidence: "custom",
    });
    expect(custom([extended(-14.2), extended(-4.1)]).proposed).toBeNull();
    expect(custom(["energy=-14.2", "energy=-14.1"]).evidence).toBe("none");
  });

  test("the question shows what each unit would mean", () => {
    const { chosen } = scan(["energy=-1.5", "energy=-1.0"]);
    const { options } = energyUnitQuestion(chosen!, findUnit(chosen!, WATER));
    const spreads = Object.fromEntries(options.map((option) => [option.id, option.spreadKcal]));
    // Half a unit in kcal/mol: methods page, section 1.
    expect(spreads["kcal/mol"]).toBeCloseTo(0.5, 12);
    expect(spreads["kJ/mol"]).toBeCloseTo(0.5 / 4.184, 12);
    expect(spreads.eV).toBeCloseTo(0.5 * 23.060547831, 8);
    expect(spreads.hartree).toBeCloseTo(0.5 * 627.50947406, 6);
    expect(options.find((option) => option.id === "hartree")?.detail).toBe(
      "Wider than conformers of one molecule",
    );
    expect(options.some((option) => option.proposed)).toBe(false);
  });
});

test("the question for the number shows the first frames and a word on each", () => {
  const question = energyFromQuestion(scan(frames("conf # E_a=@ E_b=1@ label=x")), WATER);
  expect(question).toMatchObject({ id: "energy-from", code: "energy-from" });
  expect(question?.options.map(({ id, values, proposed }) => [id, values, proposed])).toEqual([
    ["key:E_a", ["-1.25", "-1.1", "-0.75"], true],
    ["number:1", ["7", "8", "9"], false],
  ]);
});

describe("remarks on a settled column", () => {
  const remarks = (comments: string[], unit: "hartree" | "kcal/mol" | "eV", kindStated = true) =>
    energyRemarks(scan(comments, "key:E").chosen!.column, { unit, kindStated }).map(
      ({ code, frame, message }) => ({ code, frame, message }),
    );

  test("4 decimals in hartree are 0.26 kJ/mol, 11 % in a weight", () => {
    // exp(0.26255/2.478957) - 1 = 0.1117; formats page, row E11.
    expect(remarks(["E = -76.0267", "E = -76.0251"], "hartree")).toEqual([
      { code: "E11", message: "4 decimals in hartree are 0.26 kJ/mol: about 11 % in a weight at 298 K." },
    ]);
    expect(remarks(["E = -76.02671", "E = -76.0251"], "hartree")).toEqual([]);
  });

  test("a frame without energy is named, one far off too", () => {
    const comments = ["E = 1.25", "nothing", "E = 1.35", "E = 500.45", "E = 1.55", "E = ?"];
    expect(remarks(comments, "kcal/mol").map(({ code, frame }) => [code, frame])).toEqual([
      ["E10", 2],
      ["E10", 6],
      ["E12", 4],
    ]);
  });

  test("equal, narrow, wide and positive ones are told once", () => {
    expect(remarks(["E = 1.25", "E = 1.25"], "kcal/mol")[0]?.message).toBe("All 2 energies are equal.");
    expect(remarks(["E = 1.251", "E = 1.252"], "kcal/mol")[0]?.message).toContain("0.001 kcal/mol");
    const wide = Array.from({ length: 40 }, (_, k) => `E = ${10 * k}.25`);
    expect(remarks(wide, "kcal/mol")[0]?.message).toContain("span 390 kcal/mol");
    expect(remarks(["E = 1.2510001", "E = 1.2520002"], "hartree")[0]?.message).toContain("positive");
  });

  test("a kind that nobody stated is taken as electronic", () => {
    expect(remarks(["E = 1.25", "E = 1.45"], "kcal/mol", false).map(({ code }) => code)).toEqual(["E13"]);
  });
});

test("levels are suggested from comments and file names, never more", () => {
  expect(suggestLevel(["conformer 1  MMFF94  E = 51.5 kcal/mol", "a.xyz"])).toBe("MMFF94");
  expect(suggestLevel(["-235.2", "hexane.hf-def2-svp.xyz"])).toBe("HF/def2-SVP");
  expect(suggestLevel(["", "pentane.b3lyp-6-31gd.xyz"])).toBe("B3LYP/6-31G(d)");
  expect(suggestLevel(["", "cysteine.mp2-cc-pvdz.xyz"])).toBe("MP2/cc-pVDZ");
  expect(suggestLevel(["stuff", "shfile.xyz"])).toBeNull();
});

const reference = fileURLToPath(new URL("../../../../shared/reference/", import.meta.url));

describe.skipIf(!existsSync(reference))("reference ensembles beside the checkout", () => {
  // The comment styles that reference/README.md describes, and the unit each file states or can be told to have.
  test.each([
    ["alkane-conformers/hexane.published.xyz", "number:1", "bound", "kcal/mol"],
    ["alkane-conformers/hexane.hf-def2-svp.xyz", "number:1", "atoms", "hartree"],
    ["alkane-conformers/hexane.mmff94.xyz", "key:energy", "none", null],
    ["cysteine-conformers/cysteine.published.xyz", "number:2", "bound", "kcal/mol"],
    ["cysteine-conformers/cysteine.b3lyp-6-31gd.xyz", "key:energy", "atoms", "hartree"],
    ["ac-ala-levels/ac-ala-nhme.mp2-cc-pvdz.xyz", "key:energy", "atoms", "hartree"],
    ["ensembles/difluoroethane.xyz", "number:1", "none", null],
    ["ensembles/ac-ala-nhme-loose.xyz", "key:energy", "none", null],
    ["ensembles/aryl-ether.xyz", "key:energy", "custom", "eV"],
    ["ensembles/aminoester.xyz", "key:E", "bound", "kcal/mol"],
  ])("%s: %s, %s %s", (name, from, evidence, proposed) => {
    const reader = new XyzReader({ file: name });
    const read = [...reader.push(readFileSync(reference + name)), ...reader.end()];
    const one = new EnergyScan();
    for (const frame of read) one.add(frame, frame.comment);
    const findings = one.finish();
    expect([findings.verdict, findings.chosen?.from, findings.chosen?.count]).toEqual([
      "lone",
      from,
      read.length,
    ]);
    expect(findUnit(findings.chosen!, read[0]!.elements)).toMatchObject({ evidence, proposed });
  });
});
