import { and, asc, eq } from "drizzle-orm";
import { beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { ensembles, frameBlocks, frames, logbook } from "~/db/schema.server";
import type { EnsembleAnswer } from "~/lib/api/schemas";
import { record, WATER } from "../factories/mol";
import { BUTANE, formOf, frame, makeLab, post, takenIn } from "../factories/upload";
import { call } from "../setup/app";

// The `ask` rows of the acceptance tables beside those of energies: what is open waits, held, with a question.

let token: string;
beforeAll(async () => {
  ({ token } = await makeLab());
});

const BOHR = 0.529177210544;
const moved = (change: (value: number, axis: number) => string, symbol = (own: string, _k: number) => own) =>
  BUTANE.map((line, k) => {
    const [name = "", ...xyz] = line.split(/\s+/);
    return `${symbol(name, k)} ${xyz.map((text, axis) => change(Number(text), axis)).join(" ")}`;
  });
const fields = { level: "A", energyUnit: "kcal/mol" };

const question = (taken: EnsembleAnswer, id: string) => taken.intake.questions.find((one) => one.id === id);

async function answer(id: string, answers: Record<string, string>) {
  const list = Object.entries(answers).map(([key, option]) => ({ id: key, option }));
  const response = await post(token, `/ensembles/${id}/answers`, { answers: list });
  const body = await response.json();
  if (response.status !== 200) throw new Error(`${response.status}: ${JSON.stringify(body)}`);
  return body.intake as EnsembleAnswer["intake"];
}

const ensemble = async (id: string): Promise<EnsembleAnswer> =>
  (await call(`/api/v1/ensembles/${id}`, { token })).json();

async function firstPositions(ensembleId: string): Promise<number[]> {
  const [block] = await db
    .select()
    .from(frameBlocks)
    .where(and(eq(frameBlocks.ensembleId, ensembleId), eq(frameBlocks.shape, 0)))
    .orderBy(asc(frameBlocks.first));
  const data = block?.data ?? Buffer.alloc(0);
  return Array.from({ length: data.length / 8 }, (_, k) => data.readDoubleLE(8 * k));
}

describe("X27, coordinates in bohr", () => {
  const inBohr = (shift: number) =>
    moved((value, axis) => ((value + (axis === 0 ? shift : 0)) / BOHR).toFixed(10));
  const content = (tag: string) =>
    frame(`${tag} energy=-1.5`, inBohr(0)) + frame(`${tag} energy=-1.4`, inBohr(0.1));

  it("waits with a proposal, and is converted once it is confirmed", async () => {
    const taken = await takenIn(token, [{ name: "bohr.xyz", content: content("yes") }], fields);
    expect(taken).toMatchObject({ formula: "C4H10", intake: { frames: 2, accepted: 0, held: 2 } });
    expect(question(taken, "lengths")).toMatchObject({
      code: "X27",
      options: [
        { id: "bohr", proposed: true, values: [expect.stringContaining("Å"), expect.stringContaining("Å")] },
        { id: "angstrom" },
        { id: "hold" },
      ],
    });
    const intake = await answer(taken.id, { lengths: "bohr" });
    expect(intake).toMatchObject({ accepted: 2, held: 0, questions: [] });
    const now = await ensemble(taken.id);
    expect(now.levels).toMatchObject([{ name: "A", count: 2, missing: 0 }]);
    expect(now.levels[0]?.id).toBe(taken.levels[0]?.id);
    const positions = await firstPositions(taken.id);
    expect(positions[0]).toBeCloseTo(-1.948, 8);
    const [entry] = await db
      .select()
      .from(logbook)
      .where(and(eq(logbook.ensembleId, taken.id), eq(logbook.type, "answer")));
    expect(entry?.data).toMatchObject({ question: "lengths", option: "bohr", released: 2 });
    // The same answer again is a repeated call, another one a conflict; the same bytes find the ensemble.
    expect(await answer(taken.id, { lengths: "bohr" })).toMatchObject({ accepted: 2 });
    const other = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "lengths", option: "hold" }],
    });
    expect(other.status).toBe(409);
    // Reading again with other energies does not ask anew.
    const again = await post(token, `/ensembles/${taken.id}/reread`, { level: "B", energyUnit: "kJ/mol" });
    expect((await again.json()).intake).toMatchObject({ accepted: 2, questions: [] });
  });

  it("stays held where that is the answer", async () => {
    const good = frame(
      "energy=-1.2",
      moved((value) => value.toFixed(4)),
    );
    const taken = await takenIn(token, [{ name: "mixed.xyz", content: good + content("no") }], fields);
    expect(taken.intake).toMatchObject({ accepted: 1, held: 2 });
    const intake = await answer(taken.id, { lengths: "hold" });
    expect(intake).toMatchObject({ accepted: 1, held: 2, questions: [] });
    expect(intake.messages.filter(({ severity }) => severity === "hold").map(({ code }) => code)).toEqual([
      "X27",
      "X27",
    ]);
  });

  it("may be taken as Å", async () => {
    const taken = await takenIn(
      token,
      [{ name: "word.xyz", content: frame("bohr, energy=-1.5", BUTANE) }],
      fields,
    );
    expect(question(taken, "lengths")?.options.find(({ proposed }) => proposed)?.id).toBe("angstrom");
    await answer(taken.id, { lengths: "angstrom" });
    expect((await firstPositions(taken.id))[0]).toBe(-1.948);
  });
});

describe("X22, decimal commas", () => {
  it("are read as points once that is confirmed, in comments too", async () => {
    const comma = (shift: number) =>
      moved((value, axis) => (value + (axis === 0 ? shift : 0)).toFixed(4).replace(".", ","));
    const content = frame("E = -1,5 kcal/mol", comma(0)) + frame("E = -1,4 kcal/mol", comma(0.1));
    const taken = await takenIn(token, [{ name: "comma.xyz", content }], { level: "A" });
    expect(taken.intake).toMatchObject({ frames: 2, accepted: 0, held: 2 });
    expect(question(taken, "decimal-comma")?.options.map(({ id, values }) => [id, values?.[0]])).toEqual([
      ["comma", "-1.9480"],
      ["hold", "-1,9480"],
    ]);
    expect(await answer(taken.id, { "decimal-comma": "comma" })).toMatchObject({
      accepted: 2,
      questions: [],
    });
    expect((await firstPositions(taken.id))[0]).toBe(-1.948);
    expect((await ensemble(taken.id)).levels).toMatchObject([{ name: "A", unit: "kcal/mol", count: 2 }]);
  });
});

describe("X22, energies with a decimal comma beside coordinates with points", () => {
  const content = (tag: string) => frame(`energy=-15,775161 ${tag}`) + frame(`energy=-15,774161 ${tag}`);

  it("are asked about like coordinates, and read as points once that is confirmed", async () => {
    const given = { level: "A", energyUnit: "hartree", energyFrom: "key:energy" };
    for (const fields of [{ ...given }, { level: "A", energyUnit: "hartree" }]) {
      const name = `comma-${Object.keys(fields).length}.xyz`;
      const taken = await takenIn(token, [{ name, content: content(name) }], fields);
      expect(taken.intake).toMatchObject({ frames: 2, accepted: 0, held: 2 });
      expect(question(taken, "decimal-comma")).toMatchObject({
        code: "X22",
        reason: expect.stringContaining("Energies of 2 frames"),
      });
      expect(question(taken, "decimal-comma")?.options.map(({ id, values }) => [id, values?.[0]])).toEqual([
        ["comma", "-15.775161"],
        ["hold", "-15,775161"],
      ]);
      expect(taken.intake.messages.find(({ frame: of }) => of === 1)).toMatchObject({
        code: "X22",
        line: 2,
        found: "-15,775161",
      });
      const intake = await answer(taken.id, { "decimal-comma": "comma" });
      expect(intake).toMatchObject({ accepted: 2, held: 0, questions: [] });
      const { levels } = await ensemble(taken.id);
      expect(levels).toMatchObject([{ name: "A", unit: "hartree", count: 2, missing: 0 }]);
    }
  });

  it("stay held where that is the answer", async () => {
    const fields = { level: "A", energyUnit: "hartree" };
    const taken = await takenIn(token, [{ name: "held.xyz", content: content("held") }], fields);
    expect(await answer(taken.id, { "decimal-comma": "hold" })).toMatchObject({ accepted: 0, held: 2 });
  });

  it("one among others is no energy of its frame, and is quoted", async () => {
    const lone = frame("energy=-15,775161 lone") + frame("energy=-15.774161") + frame("energy=-15.773161");
    const taken = await takenIn(token, [{ name: "lone.xyz", content: lone }], {
      level: "A",
      energyUnit: "hartree",
    });
    expect(taken.intake).toMatchObject({ accepted: 3, held: 0, questions: [] });
    expect(taken.levels).toMatchObject([{ count: 2, missing: 1 }]);
    expect(taken.intake.messages.find(({ code }) => code === "E10")).toMatchObject({ found: "-15,775161" });
  });
});

describe("X22, data fields of an SDF with a decimal comma", () => {
  const waters = (name: string, first: string, second: string) =>
    [first, second]
      .map((text, k) => {
        const atoms = WATER.map(({ at: [x, y, z], symbol }) => ({ symbol, at: [x + k, y, z] as const }));
        return record(`w${k}`, { atoms, data: `> <${name}>\n${text}\n\n` });
      })
      .join("");

  it.each([
    ["MMFF94_ENERGY", { level: "A", energyUnit: "kcal/mol" }, "-12,5", "-12,3"],
    ["dG (kJ/mol)", { level: "A", energyUnit: "kJ/mol" }, "-12,6", "-12,4"],
    ["score", { level: "A", energyUnit: "kcal/mol", energyFrom: "field:score" }, "-12,7 kcal/mol", "-12,5"],
  ])("%s: are asked about, and read as points once that is confirmed", async (name, given, first, second) => {
    const taken = await takenIn(token, [{ name: "comma.sdf", content: waters(name, first, second) }], given);
    expect(taken.intake).toMatchObject({ frames: 2, accepted: 0, held: 2 });
    const [number = ""] = first.split(" ");
    expect(question(taken, "decimal-comma")?.options.map(({ id, values }) => [id, values?.[0]])).toEqual([
      ["comma", number.replace(",", ".")],
      ["hold", number],
    ]);
    const intake = await answer(taken.id, { "decimal-comma": "comma" });
    expect(intake).toMatchObject({ accepted: 2, held: 0, questions: [] });
    expect((await ensemble(taken.id)).levels).toMatchObject([{ name: "A", count: 2, missing: 0 }]);
  });
});

describe("X22, a lone comma among points", () => {
  it("is a slip, held without a question", async () => {
    const slip = [...BUTANE.slice(0, 13), "H 2,0740 0,7640 -0,8840"];
    const taken = await takenIn(
      token,
      [{ name: "slip.xyz", content: frame("-1.5 slip") + frame("-1.4", slip) }],
      fields,
    );
    expect(taken.intake).toMatchObject({ accepted: 1, held: 1, questions: [] });
    expect(taken.intake.messages.find(({ severity }) => severity === "hold")).toMatchObject({
      code: "X22",
      line: 32,
    });
  });
});

describe("X26, a leading running number", () => {
  it("is left out once that is confirmed", async () => {
    const indexed = BUTANE.map((line, k) => `${k + 1} ${line}`);
    const taken = await takenIn(token, [{ name: "index.xyz", content: frame("-1.5 x26", indexed) }], fields);
    expect(question(taken, "index-column")).toMatchObject({
      code: "X26",
      options: [{ id: "index" }, { id: "hold" }],
    });
    expect(await answer(taken.id, { "index-column": "index" })).toMatchObject({ accepted: 1, held: 0 });
  });

  it("is no running number where it does not count", async () => {
    const odd = BUTANE.map((line, k) => `${k === 3 ? 9 : k + 1} ${line}`);
    const content = frame("-1.5 odd") + frame("-1.4 odd", odd);
    const taken = await takenIn(token, [{ name: "odd.xyz", content }], fields);
    expect(taken.intake).toMatchObject({ accepted: 1, held: 1, questions: [] });
  });
});

describe("X16, names in capitals", () => {
  it("are proposed by the bond lengths, and read as chosen", async () => {
    const names = (own: string, k: number) => (k === 1 || k === 2 ? "CA" : own);
    const content = frame(
      "-1.5 x16",
      moved((value) => value.toFixed(4), names),
    );
    const taken = await takenIn(token, [{ name: "capitals.xyz", content }], fields);
    expect(taken).toMatchObject({ formula: "C4H10", intake: { accepted: 0, held: 1 } });
    expect(question(taken, "capitals")?.options.find(({ proposed }) => proposed)?.id).toBe("label");
    await answer(taken.id, { capitals: "label" });
    const [row] = await db.select().from(ensembles).where(eq(ensembles.id, taken.id));
    expect(row).toMatchObject({ formula: "C4H10", accepted: 1 });
    expect(row?.atomLabels).toMatchObject(BUTANE.map((_, k) => (k === 1 || k === 2 ? "CA" : null)));
  });

  it("can be elements", async () => {
    const content = frame("-1.5 salt", [
      "CO 0 0 0",
      "N 1.95 0 0",
      "H 2.3 0.95 0",
      "H 2.3 -0.5 0.8",
      "H 2.3 -0.5 -0.8",
    ]);
    const taken = await takenIn(token, [{ name: "cobalt.xyz", content }], fields);
    expect(question(taken, "capitals")?.options.find(({ proposed }) => proposed)?.id).toBe("element");
    expect(taken.formula).toBe("CoH3N");
    await answer(taken.id, { capitals: "element" });
    expect((await ensemble(taken.id)).intake).toMatchObject({ accepted: 1 });
  });
});

describe("X13, another order of atoms", () => {
  const reversed = [...BUTANE].reverse();
  it("is mapped by the bonds once that is confirmed", async () => {
    const content = frame("energy=-1.5 x13") + frame("energy=-1.4") + frame("energy=-1.3", reversed);
    const taken = await takenIn(token, [{ name: "order.xyz", content }], fields);
    expect(taken.intake).toMatchObject({ frames: 3, accepted: 2, held: 1 });
    expect(question(taken, "order")).toMatchObject({
      code: "X13",
      options: [{ id: "map", proposed: true }, { id: "hold" }],
    });
    expect(taken.levels).toMatchObject([{ count: 2 }]);
    const intake = await answer(taken.id, { order: "map" });
    expect(intake).toMatchObject({ accepted: 3, held: 0, questions: [] });
    const [row] = await db
      .select()
      .from(frames)
      .where(and(eq(frames.ensembleId, taken.id), eq(frames.number, 3)));
    expect(row).toMatchObject({ shape: 0, indexInShape: 2, state: "remarked" });
    const mapping = row?.mapping ?? [];
    const positions = await firstPositions(taken.id);
    // Butane backwards: whichever of the equal mappings was found, the coordinates are those of the mapped atoms.
    mapping.forEach((from, to) => {
      const written = reversed[from]?.split(/\s+/).slice(1).map(Number);
      expect(positions.slice(2 * 42 + 3 * to, 2 * 42 + 3 * to + 3)).toEqual(written);
    });
  });

  it("stays held where that is the answer", async () => {
    const content = frame("-1.5 keep") + frame("-1.4 keep") + frame("-1.3 keep", reversed);
    const taken = await takenIn(token, [{ name: "keep.xyz", content }], fields);
    const intake = await answer(taken.id, { order: "hold" });
    expect(intake).toMatchObject({ accepted: 2, held: 1, questions: [] });
    expect(intake.messages.find(({ severity }) => severity === "hold")).toMatchObject({
      code: "X13",
      frame: 3,
    });
  });

  it("says of a frame that it waits, and a release by hand settles that frame", async () => {
    const content =
      frame("-1.5 hand") + frame("-1.4 hand") + frame("-1.3 hand", reversed) + frame("-1.2 hand", reversed);
    const taken = await takenIn(token, [{ name: "hand.xyz", content }], fields);
    const waiting = taken.intake.messages.filter(({ code }) => code === "X13");
    expect(waiting).toMatchObject([
      { frame: 3, severity: "question" },
      { frame: 4, severity: "question" },
    ]);
    const path = `/ensembles/${taken.id}/frames/3/release`;
    const { intake: released } = await (await post(token, path, { reason: "looked at" })).json();
    expect(released).toMatchObject({ accepted: 3, held: 1, questions: [{ id: "order" }] });
    const both = [
      { id: "order", option: "map" },
      { id: "order", option: "hold" },
    ];
    const twice = await post(token, `/ensembles/${taken.id}/answers`, { answers: both });
    expect([twice.status, (await twice.json()).detail]).toEqual([
      422,
      expect.stringContaining("two options"),
    ]);
    // The rest stays held, and the released one stays released, read again or not.
    const intake = await answer(taken.id, { order: "hold" });
    expect(intake).toMatchObject({ accepted: 3, held: 1, questions: [] });
    expect(intake.messages.find(({ severity }) => severity === "hold")).toMatchObject({ frame: 4 });
    for (const energyUnit of ["kJ/mol", "kcal/mol"]) {
      const again = await (
        await post(token, `/ensembles/${taken.id}/reread`, { ...fields, energyUnit })
      ).json();
      expect(again.intake).toMatchObject({ accepted: 3, held: 1, questions: [] });
    }
  });

  it("is settled once the last frame that waits was released", async () => {
    const content = frame("-1.5 last") + frame("-1.4 last") + frame("-1.3 last", reversed);
    const taken = await takenIn(token, [{ name: "last.xyz", content }], fields);
    const path = `/ensembles/${taken.id}/frames/3/release`;
    const { intake } = await (await post(token, path, { reason: "looked at" })).json();
    expect(intake).toMatchObject({ accepted: 3, held: 0, questions: [] });
    const again = await (await post(token, `/ensembles/${taken.id}/reread`, fields)).json();
    expect(again.intake).toMatchObject({ accepted: 3, held: 0, questions: [] });
  });

  it("is asked of a further batch too", async () => {
    const taken = await takenIn(token, [{ name: "a.xyz", content: frame("energy=-1.5 first") }], fields);
    const form = formOf([
      { name: "b.xyz", content: frame("energy=-1.4", reversed) + frame("energy=-1.3 last") },
    ]);
    const response = await call(`/api/v1/ensembles/${taken.id}/files`, { method: "POST", token, body: form });
    const body: EnsembleAnswer = await response.json();
    expect([response.status, body.intake.accepted, body.intake.held]).toEqual([201, 2, 1]);
    expect(question(body, "order-2")).toMatchObject({ code: "X13" });
    const intake = await answer(taken.id, { "order-2": "map" });
    expect(intake).toMatchObject({ frames: 3, accepted: 3, held: 0, questions: [] });
    expect((await ensemble(taken.id)).levels).toMatchObject([{ name: "A", count: 3, missing: 0 }]);
  });
});

describe("X12 and S21, several molecules", () => {
  const water = (by: number) =>
    frame(`-0.${by}5`, [`O ${by} 0 0.12`, `H ${by} 0.76 -0.47`, `H ${by} -0.76 -0.47`]);

  it("lets another one be the ensemble", async () => {
    const content = frame("-1.5 two") + frame("-1.4 two") + water(1) + water(2);
    const taken = await takenIn(token, [{ name: "two.xyz", content }], fields);
    // Of equal groups that of the earliest frame, which is used at once.
    expect(taken).toMatchObject({ formula: "C4H10", intake: { accepted: 2, held: 2 } });
    expect(question(taken, "group")?.options.map(({ id, text }) => [id, text])).toEqual([
      ["frame:1", "C4H10"],
      ["frame:3", "H2O"],
    ]);
    await answer(taken.id, { group: "frame:3" });
    const now = await ensemble(taken.id);
    expect(now).toMatchObject({ formula: "H2O", atoms: 3, intake: { accepted: 2, held: 2, questions: [] } });
    expect(now.levels).toMatchObject([{ count: 2, missing: 0 }]);
  });

  it("is confirmed without reading again", async () => {
    const content = frame("-1.5 three") + frame("-1.4 three") + water(3) + water(4);
    const taken = await takenIn(token, [{ name: "three.xyz", content }], fields);
    expect(await answer(taken.id, { group: "frame:1" })).toMatchObject({
      accepted: 2,
      held: 2,
      questions: [],
    });
  });

  it("asks nothing for a stray frame", async () => {
    const content = [1, 2, 3, 4].map((k) => frame(`-1.${k} stray`)).join("") + water(5);
    const taken = await takenIn(token, [{ name: "stray.xyz", content }], fields);
    expect(taken.intake).toMatchObject({ accepted: 4, held: 1, questions: [] });
  });

  it("is asked of every SDF with several", async () => {
    const methane = record("m", {
      atoms: [
        { symbol: "C", at: [0, 0, 0] },
        { symbol: "H", at: [0.63, 0.63, 0.63] },
        { symbol: "H", at: [-0.63, -0.63, 0.63] },
        { symbol: "H", at: [-0.63, 0.63, -0.63] },
        { symbol: "H", at: [0.63, -0.63, -0.63] },
      ],
      bonds: [2, 3, 4, 5].map((k) => [1, k, 1] as const),
    });
    const taken = await takenIn(token, [
      { name: "s21.sdf", content: record("a") + record("b") + record("c") + methane },
    ]);
    expect(question(taken, "group")).toMatchObject({
      code: "S21",
      options: [{ text: "H2O" }, { text: "CH4" }],
    });
    await answer(taken.id, { group: "frame:4" });
    expect(await ensemble(taken.id)).toMatchObject({ formula: "CH4", intake: { accepted: 1, held: 3 } });
    // The molecule too can be answered anew.
    const anew = { answers: [{ id: "group", option: "frame:1" }] };
    expect((await post(token, `/ensembles/${taken.id}/reread`, anew)).status).toBe(200);
    expect(await ensemble(taken.id)).toMatchObject({ formula: "H2O", intake: { accepted: 3, held: 1 } });
  });
});

describe("S23, several configurations", () => {
  const haloform = (sign: 1 | -1, energy: number) =>
    record(`m${energy}`, {
      atoms: [
        { symbol: "C", at: [0, 0, 0] },
        { symbol: "H", at: [0, 0, 1.09] },
        { symbol: "F", at: [1.27, 0, -0.42 + energy / 1000] },
        { symbol: "Cl", at: [-0.83, 1.44 * sign, -0.55] },
        { symbol: "Br", at: [-0.91, -1.58 * sign, -0.62] },
      ],
      bonds: [2, 3, 4, 5].map((k) => [1, k, 1] as const),
      data: `> <E>\n${energy}\n\n`,
    });
  const content = (tag: number, minority: 1 | -1 = -1) =>
    ([1, 1, minority, 1, 1] as const).map((sign, k) => haloform(sign, tag + k)).join("");
  const take = (tag: number) =>
    takenIn(token, [{ name: `s23-${tag}.sdf`, content: content(tag) }], { ...fields, energyFrom: "field:E" });
  const heldOf = ({ intake }: EnsembleAnswer) =>
    intake.messages
      .filter(({ code, severity }) => code === "X40" && severity === "hold")
      .map(({ frame }) => frame);
  const reread = async (id: string, energyUnit: string) => {
    const again = await post(token, `/ensembles/${id}/reread`, {
      ...fields,
      energyUnit,
      energyFrom: "field:E",
    });
    expect(again.status).toBe(200);
    return ensemble(id);
  };

  it("lets another one be the ensemble, for good", async () => {
    const taken = await take(10);
    expect(taken.intake).toMatchObject({ accepted: 4, held: 1 });
    expect(heldOf(taken)).toEqual([3]);
    expect(question(taken, "configuration")).toMatchObject({
      code: "S23",
      options: [
        { id: "frame:1", text: expect.stringMatching(/^C1 is [RS]$/) },
        { id: "frame:3", text: expect.stringMatching(/^C1 is [RS]$/) },
      ],
    });
    // A single frame of another configuration is never let in.
    expect((await post(token, `/ensembles/${taken.id}/frames/3/release`, { reason: "no" })).status).toBe(409);
    await answer(taken.id, { configuration: "frame:3" });
    const now = await ensemble(taken.id);
    expect(now.intake).toMatchObject({ accepted: 1, held: 4, questions: [] });
    expect(heldOf(now)).toEqual([1, 2, 4, 5]);
    expect(now.levels).toMatchObject([{ count: 1 }]);
    expect((await post(token, `/ensembles/${taken.id}/frames/1/release`, { reason: "no" })).status).toBe(409);
    expect((await reread(taken.id, "kJ/mol")).intake).toMatchObject({ accepted: 1, held: 4, questions: [] });
    expect(heldOf(await ensemble(taken.id))).toEqual([1, 2, 4, 5]);
  });

  it("is confirmed without reading again, and stays so when it is", async () => {
    const taken = await take(20);
    expect(await answer(taken.id, { configuration: "frame:1" })).toMatchObject({
      accepted: 4,
      held: 1,
      questions: [],
    });
    expect((await reread(taken.id, "kJ/mol")).intake).toMatchObject({ accepted: 4, held: 1, questions: [] });
    // Another answer now would be another ensemble.
    const other = { answers: [{ id: "configuration", option: "frame:3" }] };
    const refused = await post(token, `/ensembles/${taken.id}/answers`, other);
    expect(refused.status).toBe(409);
    expect((await refused.json()).detail).toContain(`/api/v1/ensembles/${taken.id}/reread`);
  });

  it("is answered anew, or asked again, with a reading that says so", async () => {
    const taken = await take(40);
    await answer(taken.id, { configuration: "frame:3" });
    const anew = async (option: string) => {
      const asked = { ...fields, energyFrom: "field:E", answers: [{ id: "configuration", option }] };
      const again = await post(token, `/ensembles/${taken.id}/reread`, asked);
      return { status: again.status, now: await ensemble(taken.id) };
    };
    const changed = await anew("frame:1");
    expect(changed.status).toBe(200);
    expect(changed.now.intake).toMatchObject({ accepted: 4, held: 1, questions: [] });
    expect(heldOf(changed.now)).toEqual([3]);
    // It is kept like a first answer, and every answer stands in the logbook.
    expect((await reread(taken.id, "kJ/mol")).intake).toMatchObject({ accepted: 4, questions: [] });
    const entries = await db
      .select({ data: logbook.data })
      .from(logbook)
      .where(and(eq(logbook.ensembleId, taken.id), eq(logbook.type, "answer")))
      .orderBy(asc(logbook.id));
    expect(entries).toMatchObject([{ data: { option: "frame:3" } }, { data: { option: "frame:1" } }]);
    const open = await anew("ask");
    expect(open.now.intake).toMatchObject({ accepted: 4, held: 1, questions: [{ id: "configuration" }] });
    expect(await answer(taken.id, { configuration: "frame:3" })).toMatchObject({ accepted: 1, held: 4 });
    expect((await anew("frame:2")).status).toBe(422);
    const energies = { ...fields, answers: [{ id: "energy-unit", option: "eV" }] };
    expect((await post(token, `/ensembles/${taken.id}/reread`, energies)).status).toBe(422);
  });

  it("waits for nobody, and a frame of XYZ is held without a question (X40)", async () => {
    const taken = await take(30);
    expect((await reread(taken.id, "kJ/mol")).intake.questions).toMatchObject([{ id: "configuration" }]);
    const atoms = (sign: number) => [
      ...["C 0 0 0", "H 0 0 1.09", "F 1.27 0 -0.42"],
      ...[`Cl -0.83 ${1.44 * sign} -0.55`, `Br -0.91 ${-1.58 * sign} -0.62`],
    ];
    const xyz = [1, 1, -1, 1, 1].map((sign, k) => frame(`-1.${k} hands`, atoms(sign))).join("");
    const held = await takenIn(token, [{ name: "hands.xyz", content: xyz }], fields);
    expect(held.intake).toMatchObject({ accepted: 4, held: 1, questions: [] });
    expect(heldOf(held)).toEqual([3]);
  });
});

describe("S12, hydrogens without coordinates", () => {
  const ethanol = (by: number) =>
    record("ethanol", {
      atoms: [
        { symbol: "C", at: [-1.18 + by, -0.35, 0.1] },
        { symbol: "C", at: [by, 0.55, 0] },
        { symbol: "O", at: [1.19 + by, -0.21, 0.05] },
      ],
      bonds: [
        [1, 2, 1],
        [2, 3, 1],
      ],
    });

  it("waits, and is used as heavy atoms only where somebody says so", async () => {
    const taken = await takenIn(token, [{ name: "heavy.sdf", content: ethanol(0) + ethanol(0.1) }]);
    expect(taken.intake).toMatchObject({ frames: 2, accepted: 0, held: 2 });
    expect(question(taken, "hydrogens")).toMatchObject({
      code: "S12",
      options: [{ id: "hold", proposed: true }, { id: "heavy" }],
    });
    const intake = await answer(taken.id, { hydrogens: "heavy" });
    expect(intake).toMatchObject({ accepted: 2, remarked: 2, held: 0 });
    expect(intake.messages.find(({ code }) => code === "S12")?.message).toContain("heavy atoms only");
  });
});

describe("several questions at once", () => {
  it("are answered in one call, those of the energies too", async () => {
    const lines = moved((value) => (value / BOHR).toFixed(10)).map((line, k) => `${k + 1} ${line}`);
    const content = frame("ea=-1.5 eb=-2.5", lines);
    const taken = await takenIn(token, [{ name: "many.xyz", content }], fields);
    expect(taken.intake.questions.map(({ id }) => id).sort()).toEqual([
      "energy-from",
      "index-column",
      "lengths",
    ]);
    const intake = await answer(taken.id, {
      lengths: "bohr",
      "energy-from": "key:eb",
      "index-column": "index",
    });
    expect(intake).toMatchObject({ accepted: 1, held: 0, questions: [] });
    const now = await ensemble(taken.id);
    expect(now.levels).toMatchObject([{ name: "A", count: 1 }]);
  });

  it("one after the other, in any order", async () => {
    const lines = moved((value) => (value / BOHR).toFixed(9)).map((line, k) => `${k} ${line}`);
    const taken = await takenIn(
      token,
      [{ name: "steps.xyz", content: frame("ea=-1.5 eb=-2.5", lines) }],
      fields,
    );
    expect(await answer(taken.id, { lengths: "bohr" })).toMatchObject({ accepted: 0, held: 1 });
    expect(await answer(taken.id, { "energy-from": "key:ea" })).toMatchObject({ accepted: 0, held: 1 });
    expect(await answer(taken.id, { "index-column": "index" })).toMatchObject({
      accepted: 1,
      held: 0,
      questions: [],
    });
    expect((await ensemble(taken.id)).levels).toMatchObject([{ name: "A", count: 1 }]);
    const unknown = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "capitals", option: "label" }],
    });
    expect(unknown.status).toBe(422);
  });
});
