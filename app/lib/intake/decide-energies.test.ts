import { describe, expect, it } from "vitest";
import { DomainError } from "../errors.ts";
import {
  type DecisionMode,
  decideEnergies,
  type EnergyAnswers,
  type EnergyDecision,
} from "./decide-energies.ts";
import { EnergyScan } from "./energies.ts";
import { settleEnergies } from "./settle-energies.ts";

const WATER = Uint8Array.of(8, 1, 1);
const NOTHING: EnergyAnswers = {
  energyUnit: null,
  energyFrom: null,
  level: null,
  energyKind: "electronic",
  energyTemperature: null,
};
const PROGRAM: DecisionMode = { refuseOpen: true, confirmUnit: false, knownLevels: [], comment: "" };
const PERSON: DecisionMode = { refuseOpen: false, confirmUnit: true, knownLevels: ["PM7"], comment: "" };

function scan(comments: string[], from: string | null = null) {
  const found = new EnergyScan({ from });
  for (const [k, comment] of comments.entries()) {
    found.add({ number: k + 1, file: "a.xyz", line: 5 * k + 1 }, comment);
  }
  return found.finish();
}

function decide(comments: string[], answers: Partial<EnergyAnswers>, mode: DecisionMode): EnergyDecision {
  const all = { ...NOTHING, ...answers };
  const from = all.energyFrom === "none" ? null : all.energyFrom;
  return decideEnergies(scan(comments, from), WATER, all, { ...mode, comment: comments[0] ?? "" });
}

/** Ids of the questions, in order. */
function asked(decision: EnergyDecision): string[] {
  return decision.kind === "ask" ? decision.questions.map((question) => question.id) : [];
}

const LONE = ["energy=-1.5", "energy=-1.4"];
const BOUND = ["E = -1.5 kcal/mol", "E = -1.4 kcal/mol"];
const SEVERAL = ["E_a= -1.5 E_b= -2.5", "E_a= -1.4 E_b= -2.4"];

describe("a program's request", () => {
  it("is taken with unit and level stated, or with the unit beside the number", () => {
    const stated = decide(LONE, { level: "M", energyUnit: "hartree" }, PROGRAM);
    expect(stated).toMatchObject({
      kind: "column",
      unit: "hartree",
      level: "M",
      candidate: { from: "key:energy" },
    });
    expect(decide(BOUND, { level: "M" }, PROGRAM)).toMatchObject({ kind: "column", unit: "kcal/mol" });
  });

  it.each([
    [LONE, { level: "M" }, ["energyUnit"]],
    [BOUND, {}, ["level"]],
    [LONE, {}, ["energyUnit", "level"]],
  ] as const)("%j with %j is refused for %j", (comments, answers, fields) => {
    let refusal: unknown;
    try {
      decide([...comments], answers, PROGRAM);
    } catch (error) {
      refusal = error;
    }
    expect(refusal).toBeInstanceOf(DomainError);
    expect((refusal as DomainError).code).toBe("invalid");
    expect((refusal as DomainError).faults.map((fault) => fault.field)).toEqual(fields);
  });

  it("with several numbers becomes a question, and one for the level where that is open too", () => {
    expect(asked(decide(SEVERAL, { level: "M" }, PROGRAM))).toEqual(["energy-from"]);
    expect(asked(decide(SEVERAL, {}, PROGRAM))).toEqual(["energy-from", "level"]);
  });

  it("that contradicts the file is taken at its word, with a remark", () => {
    const decision = decide(BOUND, { level: "M", energyUnit: "hartree" }, PROGRAM);
    expect(decision).toMatchObject({ unit: "hartree", messages: [{ code: "E06" }] });
  });

  it("for structures without energies needs nothing; a level that was named is remarked on", () => {
    expect(decide(["", "conf 2"], {}, PROGRAM)).toEqual({ kind: "none", messages: [] });
    expect(decide(["", "conf 2"], { level: "M" }, PROGRAM)).toMatchObject({ messages: [{ code: "E10" }] });
    expect(decide(LONE, { energyFrom: "none" }, PROGRAM)).toEqual({ kind: "none", messages: [] });
  });
});

describe("a person", () => {
  it("confirms the unit even where the file names it, and names the level", () => {
    const decision = decide(BOUND, {}, PERSON);
    expect(asked(decision)).toEqual(["energy-unit", "level"]);
    const [unit] = decision.kind === "ask" ? decision.questions : [];
    expect(unit?.options.find((option) => option.proposed)?.id).toBe("kcal/mol");
    expect(unit?.options.at(-1)?.id).toBe("none");
  });

  it("is offered the level that the comment names before those in use", () => {
    const decision = decide(["MMFF94 E = -1.5 kcal/mol", "MMFF94 E = -1.4 kcal/mol"], {}, PERSON);
    const level = decision.kind === "ask" ? decision.questions[1] : undefined;
    expect(level?.options).toMatchObject([
      { id: "MMFF94", proposed: true },
      { id: "PM7", proposed: false },
    ]);
  });

  it("is asked for the number first, then for the unit", () => {
    expect(asked(decide(SEVERAL, { level: "M" }, PERSON))).toEqual(["energy-from"]);
    expect(asked(decide(SEVERAL, { level: "M", energyFrom: "key:E_b" }, PERSON))).toEqual(["energy-unit"]);
    const all = { level: "M", energyFrom: "key:E_b", energyUnit: "eV" };
    expect(decide(SEVERAL, all, PERSON)).toMatchObject({ kind: "column", candidate: { from: "key:E_b" } });
  });
});

describe("columns of a decision", () => {
  const comments = [
    "Properties=species:S:1:pos:R:3 energy=-1.5 mu=0.25 charge=0",
    "Properties=species:S:1:pos:R:3 mu=0.5 charge=0 name=7",
    "Properties=species:S:1:pos:R:3 energy=-1.25 charge=0",
  ];
  const answers = { ...NOTHING, level: "M", energyUnit: "eV", energyFrom: "key:energy" };

  it("stand by frame number, missing ones absent; further keys under their own names", () => {
    const findings = scan(comments, "key:energy");
    const decision = decideEnergies(findings, WATER, answers, PROGRAM);
    expect(decision.kind).toBe("column");
    if (decision.kind === "ask") return;
    const settled = settleEnergies(decision, {
      findings,
      answers,
      kindStated: false,
      extended: true,
      // The fourth frame could not be read and was never scanned.
      frames: 4,
      accepted: (frame) => frame < 4,
    });
    expect(settled.columns.map(({ name, kind, unit, count }) => ({ name, kind, unit, count }))).toEqual([
      { name: "M", kind: "energy", unit: "eV", count: 2 },
      { name: "mu", kind: "property", unit: null, count: 2 },
    ]);
    expect([...(settled.columns[0]?.data.values ?? [])]).toEqual([-1.5, 0, -1.25, 0]);
    expect([...(settled.columns[0]?.data.present ?? [])]).toEqual([1, 0, 1, 0]);
    expect(settled.messages.map(({ code, frame }) => [code, frame])).toEqual(
      expect.arrayContaining([
        ["E10", 2],
        ["E13", undefined],
      ]),
    );
  });
});

describe("the level that is proposed", () => {
  const level = (comments: string[], answers: Partial<EnergyAnswers>) => {
    const decision = decide(comments, answers, PERSON);
    const question =
      decision.kind === "ask" ? decision.questions.find(({ id }) => id === "level") : undefined;
    return question?.options.find(({ proposed }) => proposed)?.id ?? null;
  };
  const BOTH = ["MMFF94_energy=35.12 UFF_energy=41.2", "MMFF94_energy=36.12 UFF_energy=43.2"];

  it("hangs on the number that is chosen where keys name two methods, and is none before", () => {
    expect(level(BOTH, {})).toBeNull();
    expect(level(BOTH, { energyFrom: "key:UFF_energy" })).toBe("UFF");
    expect(level(BOTH, { energyFrom: "key:MMFF94_energy" })).toBe("MMFF94");
  });

  it("is not that of another number's key", () => {
    const comments = ["MMFF94=35.12 other_energy=41.2", "MMFF94=36.12 other_energy=43.2"];
    expect(level(comments, { energyFrom: "key:other_energy" })).toBeNull();
    expect(level(comments, { energyFrom: "key:MMFF94" })).toBe("MMFF94");
  });
});
