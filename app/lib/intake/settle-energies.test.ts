import { describe, expect, it } from "vitest";
import { DomainError } from "../errors.ts";
import { type DecisionMode, decideEnergies, type EnergyAnswers } from "./decide-energies.ts";
import { EnergyScan } from "./energies.ts";
import { isExtended } from "./extended-comment.ts";
import { settleEnergies } from "./settle-energies.ts";

const WATER = Uint8Array.of(8, 1, 1);
const ANSWERS: EnergyAnswers = {
  energyUnit: "kcal/mol",
  energyFrom: null,
  level: "M",
  energyKind: "electronic",
  energyTemperature: null,
};
const PROGRAM: DecisionMode = { refuseOpen: true, confirmUnit: false, knownLevels: [], comment: "" };

function settle(comments: readonly string[], more: Partial<EnergyAnswers> = {}, maxColumns?: number) {
  const answers = { ...ANSWERS, ...more };
  const scan = new EnergyScan({ from: answers.energyFrom, maxColumns });
  for (const [k, comment] of comments.entries()) {
    scan.add({ number: k + 1, file: "a.xyz", line: 5 * k + 1 }, comment);
  }
  const findings = scan.finish();
  const decision = decideEnergies(findings, WATER, answers, { ...PROGRAM, comment: comments[0] ?? "" });
  if (decision.kind === "ask") throw new Error(`asked ${decision.questions.map(({ id }) => id)}`);
  return settleEnergies(decision, {
    findings,
    answers,
    kindStated: true,
    extended: comments.filter(isExtended).length * 2 > comments.length,
    frames: comments.length,
    accepted: () => true,
  });
}

/** "E10 2: words (found)" of every message but those on digits and spreads. */
function says(settled: ReturnType<typeof settle>): string[] {
  return all(settled).filter((line) => !/^E1[12]/.test(line));
}

function all(settled: ReturnType<typeof settle>): string[] {
  return settled.messages.map(
    ({ code, frame, message, found }) =>
      `${code} ${frame ?? "-"}: ${message}${found === undefined ? "" : ` (${found})`}`,
  );
}

const PROPERTIES = "Properties=species:S:1:pos:R:3";

describe("further keys of extended comments", () => {
  it("become columns, announced or not, but not the words of plain text", () => {
    const names = (comments: string[]) => settle(comments).columns.map(({ name }) => name);
    expect(names(["energy=-1.5 mu=0.25", "energy=-1.4 mu=0.5"])).toEqual(["M", "mu"]);
    expect(names([`${PROPERTIES} energy=-1.5 mu=0.25`])).toEqual(["M", "mu"]);
    expect(names(["conf 7 E = -1.5 time = 12", "conf 8 E = -1.4 time = 13"])).toEqual(["M"]);
  });

  it("that have the name of the level are kept under another, and it is said", () => {
    const settled = settle(["energy=-1.5 mp2=-2.5", "energy=-1.4 mp2=-2.25"], {
      level: "mp2",
      energyFrom: "key:energy",
    });
    expect(settled.columns.map(({ name, kind }) => [name, kind])).toEqual([
      ["mp2", "energy"],
      ["mp2 (2)", "property"],
    ]);
    expect([...(settled.columns[1]?.data.values ?? [])]).toEqual([-2.5, -2.25]);
    expect(says(settled)).toEqual([
      "C05 -: The name of a key is taken by another column: “mp2” is “mp2 (2)”.",
    ]);
  });

  it("that hold text, logicals or several numbers are named in one remark", () => {
    const comment = `energy=-1.5 method=B3LYP converged=T dipole="1 2 3" name=c1 energy_unit=eV`;
    expect(says(settle([comment, comment], { energyUnit: "eV" }))).toEqual([
      "C14 -: “method”, “converged” and “dipole” hold text or several numbers: kept with the frames, no column is made of it. (B3LYP)",
    ]);
  });

  it("with a comma are no text: it may be a decimal comma, and that is said", () => {
    const { messages } = settle(['energy=-1.5 mu=1,25 axes="1,2 3,4"', 'energy=-1.4 mu=1,5 axes="1,2 3,4"']);
    expect(
      messages.flatMap(({ code, message, found, hint }) => (code === "C14" ? [[message, found, hint]] : [])),
    ).toEqual([
      [
        "“axes” holds text or several numbers: kept with the frames, no column is made of it.",
        "1,2 3,4",
        undefined,
      ],
      [
        "“mu” holds numbers with a comma: kept with the frames, no column is made of it.",
        "1,25",
        "Decimal comma or thousands? Write it with a point and nothing else, and send it again.",
      ],
    ]);
    const some = settle(["energy=-1.5 mu=1,25", "energy=-1.4 mu=1.5"]).messages;
    expect(some.find(({ code }) => code === "C14")).toMatchObject({
      frame: 1,
      hint: expect.stringContaining("Decimal comma"),
    });
  });

  it("with text in some frames leave the value missing there, in one message a frame", () => {
    const settled = settle([
      "energy=-1.5 mu=nan q=1,5",
      "energy=-1.4 mu=0.5 q=1.5",
      "energy=-1.3 mu=0.75 q=x",
      "energy=-1.2 q=2.5",
    ]);
    expect(settled.columns.map(({ name, count }) => [name, count])).toEqual([
      ["M", 4],
      ["mu", 2],
      ["q", 2],
    ]);
    expect(says(settled)).toEqual([
      "C14 1: “mu” holds “nan” and “q” holds “1,5”, which is no number: the value is missing there.",
      "C14 3: “q” holds “x”, which is no number: the value is missing there.",
    ]);
  });

  it("beyond the limit are left out, and named in one remark", () => {
    const many = Array.from({ length: 3000 }, (_, k) => `k${k}=${k}.5`).join(" ");
    const settled = settle([`${many} energy=-1.5`, `${many} energy=-1.4`]);
    // The energy is found however far behind it stands.
    expect(settled.columns[0]).toMatchObject({ name: "M", count: 2 });
    expect(settled.columns).toHaveLength(201);
    expect(says(settled)).toEqual([
      "G11 -: The limit of columns is met: 200 were made, and “k200”, “k201”, “k202”, “k203”, “k204” and 2,795 more are left out.",
    ]);
    expect(settle(["energy=-1.5 a=1.5 b=2.5 c=3.5"], {}, 2).columns).toHaveLength(3);
  });

  it("carry the unit in brackets behind their name; angles average on the circle", () => {
    const { columns } = settle(["energy=-1.5 phi[deg]=170.5 psi[°]=1.5 R[Å]=3.5 gap(eV)=1.5"]);
    expect(columns.map(({ name, unit, rule }) => [name, unit, rule])).toEqual([
      ["M", "kcal/mol", null],
      ["R[Å]", "Å", "linear"],
      ["gap(eV)", "eV", "linear"],
      ["phi[deg]", "deg", "circular"],
      ["psi[°]", "°", "circular"],
    ]);
  });
});

describe("energies that are no numbers", () => {
  it("are told with what stands there, also before the first number", () => {
    const settled = settle(["energy=1,234", "energy=-1.5", "energy=1e400", "energy=", "energy=*****"]);
    expect(settled.columns[0]).toMatchObject({ name: "M", count: 1 });
    expect([...(settled.columns[0]?.data.values ?? [])]).toEqual([0, -1.5, 0, 0, 0]);
    expect(says(settled)).toEqual([
      "E10 1: The energy is not a number. (1,234)",
      "E10 3: The energy is a number out of range. (1e400)",
      "E10 4: The frame has no energy.",
      "E10 5: The energy is not a number. (*****)",
    ]);
    expect(settled.messages[0]?.hint).toContain("Decimal comma");
  });

  it("in every frame make no level, and each frame says what it holds", () => {
    const settled = settle(["energy=1,234", "energy=1,235"]);
    expect(settled.columns).toEqual([]);
    expect(says(settled)).toEqual([
      "E10 1: The energy is not a number. (1,234)",
      "E10 2: The energy is not a number. (1,235)",
      "E10 -: The comment lines hold no number as “energy”, so the level “M” was not made. (1,234)",
    ]);
  });

  it("are not replaced by the next best number", () => {
    expect(() => settle(["energy=1,234 x=3.25", "energy=1,235 x=3.5"])).toThrow("asked energy-from");
  });

  it("out of range count as numbers of the comment line", () => {
    const settled = settle(["1e400 -1.5", "1e400 -1.4"], { energyFrom: "number:2" });
    expect([...(settled.columns[0]?.data.values ?? [])]).toEqual([-1.5, -1.4]);
    const bare = settle(["-1.5", `${"9".repeat(400)}.5`]);
    expect(says(bare)[0]).toMatch(/^E10 2: The energy is a number out of range\. \(9{79}…\)$/);
  });
});

describe("two units beside one number", () => {
  const mixed = ["E=-1.5 kcal/mol", "E=-1.4 kcal/mol", "E=-5.8 kJ/mol"];

  it("are refused with the words of the file where nothing says which is meant", () => {
    for (const energyUnit of [null, "hartree"]) {
      expect(() => settle(mixed, { energyUnit })).toThrow(
        "Different units stand beside “E”: kcal/mol in 2 frames, kJ/mol in 1 frame.",
      );
      expect(() => settle(mixed, { energyUnit })).toThrow(DomainError);
    }
  });

  it("leave those with another than the one stated without energy, never converted or misread", () => {
    const settled = settle(mixed, { energyUnit: "kcal/mol" });
    expect(settled.columns[0]).toMatchObject({ unit: "kcal/mol", count: 2 });
    expect([...(settled.columns[0]?.data.present ?? [])]).toEqual([1, 1, 0]);
    expect(says(settled)[0]).toBe(
      "E06 3: The energy is written in kJ/mol, and the level is in kcal/mol: it is left out. (kJ/mol)",
    );
  });
});

describe("kind and temperature", () => {
  const comments = ["energy=-1.55", "energy=-1.45"];

  it("a free energy without its temperature is remarked on, one with it is not", () => {
    expect(says(settle(comments, { energyKind: "free" }))).toEqual([
      "E13 -: These are free energies, and their temperature is not stated.",
    ]);
    expect(says(settle(comments, { energyKind: "free", energyTemperature: 310 }))).toEqual([]);
  });

  it("a temperature that nothing uses is remarked on", () => {
    expect(says(settle(comments, { energyTemperature: 310 }))).toEqual([
      "E13 -: Electronic energies belong to no temperature: the 310 K that were stated are kept and not used.",
    ]);
    expect(says(settle(["no number"], { level: null, energyUnit: null, energyKind: "free" }))).toEqual([
      "E10 -: The comment lines hold no energy, so no level was made, and energyKind=free is not used.",
    ]);
  });
});

describe("digits and spreads", () => {
  const of = (comments: string[], energyUnit: string) => all(settle(comments, { energyUnit }));

  it("are told in numbers that a person can read", () => {
    expect(of(["energy=-76", "energy=-75"], "hartree")).toEqual([
      "E11 -: No decimals in hartree are 2,625 kJ/mol: more than a factor of 1,000 in a weight at 298 K.",
      "E12 -: The energies span 628 kcal/mol, more than conformers of one molecule do.",
    ]);
    expect(of(["energy=-1.5e12", "energy=1.5"], "hartree")).toContain(
      "E12 -: The energies span more than a million kcal/mol, more than conformers of one molecule do.",
    );
    expect(of(["energy=-1.5000000000000", "energy=-1.5000000000001"], "kcal/mol")).toEqual([
      "E12 -: The energies span less than 0.000001 kcal/mol, less than conformers of one molecule do.",
    ]);
  });

  it("name the unit that would fit, by the unit that was taken", () => {
    const hint = (comments: string[], energyUnit: string) =>
      settle(comments, { energyUnit }).messages.find(({ code }) => code === "E12")?.hint;
    expect(hint(["energy=-76.026", "energy=-76.021"], "kcal/mol")).toBe(
      "Is the unit right? Read as hartree they would span 3.1 kcal/mol.",
    );
    expect(hint(["energy=1.25", "energy=3.25"], "cm-1")).toBe(
      "Is the unit right? Read as eV they would span 46 kcal/mol.",
    );
    expect(hint(["energy=-76.0260000001", "energy=-76.0260000002"], "hartree")).toBe(
      "Is the unit right, and are these different conformers?",
    );
  });
});
