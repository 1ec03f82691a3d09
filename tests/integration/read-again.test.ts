import { and, asc, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { logbook } from "~/db/schema.server";
import { loadIntake } from "~/services/ensembles/load-intake.server";
import { personOf } from "../factories/editions";
import { makeMember } from "../factories/people";
import { BUTANE, frame, makeLab, post, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let analyst: Awaited<ReturnType<typeof makeMember>>;
let reader: Awaited<ReturnType<typeof makeMember>>;
let id = "";

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab();
  analyst = await makeMember(lab.team.id, "analyst");
  reader = await makeMember(lab.team.id, "reader");
  const content = frame("energy=-1.5", BUTANE) + frame("energy=-1.25", BUTANE);
  const fields = { level: "First", energyUnit: "kcal/mol", energyFrom: "key:energy" };
  id = (await takenIn(lab.token, [{ name: "again.xyz", content }], fields)).id;
});
afterAll(() => runner.stop());

const levels = async () => {
  const answer = await call(`/api/v1/ensembles/${id}`, { token: lab.token });
  return ((await answer.json()) as { levels: { name: string; unit: string }[] }).levels;
};
const send = (cookie: string, form: Record<string, string>) =>
  call(`/ensembles/${id}/intake`, { cookie, form: { intent: "reread", ...form } });

describe("the entry of a reading again", () => {
  const entries = async (ensembleId: string) => {
    const rows = await db
      .select({ data: logbook.data })
      .from(logbook)
      .where(and(eq(logbook.ensembleId, ensembleId), eq(logbook.type, "reread")))
      .orderBy(asc(logbook.id));
    return rows.map(({ data }) => data);
  };
  const content = [1, 2, 3].map((k) => frame(`E_one= -${k}.5 E_two= -${2 * k}.25`, BUTANE)).join("");

  it("says what was in force before, answered on the cards", async () => {
    const taken = await takenIn(lab.token, [{ name: "cards.xyz", content }], { level: "Cards" });
    const given = {
      answers: [
        { id: "energy-from", option: "key:E_one" },
        { id: "energy-unit", option: "kJ/mol" },
      ],
    };
    expect((await post(lab.token, `/ensembles/${taken.id}/answers`, given)).status).toBe(200);
    const form = { intent: "reread", level: "Second", energyUnit: "eV", energyFrom: "key:E_two" };
    const page = `/ensembles/${taken.id}/intake`;
    expect((await call(page, { cookie: analyst.cookie, form })).status).toBe(200);
    // The second time by the interface.
    const body = { level: "Third", energyUnit: "hartree", energyFrom: "key:E_one" };
    expect((await post(lab.token, `/ensembles/${taken.id}/reread`, body)).status).toBe(200);
    expect(await entries(taken.id)).toMatchObject([
      {
        before: { level: "Cards", energyUnit: "kJ/mol", energyFrom: "key:E_one" },
        after: { level: "Second", energyUnit: "eV", energyFrom: "key:E_two" },
      },
      { before: { level: "Second", energyUnit: "eV", energyFrom: "key:E_two" } },
    ]);
  });
});

describe("reading again from the page of intake", () => {
  it("puts a wrong unit and level right", async () => {
    const form = { level: "Second", energyUnit: "hartree", energyFrom: "key:energy", energyKind: "free" };
    // As a person types it: with a decimal comma and the unit.
    expect((await send(analyst.cookie, { ...form, energyTemperature: "298,15 K" })).status).toBe(200);
    expect(await levels()).toMatchObject([{ name: "Second", unit: "hartree" }]);
    const { inForce } = await loadIntake({ actor: personOf(analyst.id), ensembleId: id });
    expect(inForce).toEqual([
      {
        ...{ level: "Second", from: "key:energy", unit: "hartree" },
        ...{ kind: "free", kindStated: true, temperature: 298.15 },
      },
    ]);
    // The form starts from what is in force, the number too.
    const page = await (await call(`/ensembles/${id}/intake`, { cookie: analyst.cookie })).text();
    expect(page).toContain("How the files are read");
    expect(page).toMatch(/name="energyFrom">.*<option value="key:energy" selected=""/);
  });

  it("refuses what is no answer, in words, and changes nothing", async () => {
    const refused = await send(analyst.cookie, { level: "Third", energyFrom: "energy" });
    expect(refused.status).toBe(400);
    expect(await refused.text()).toContain("Write key:NAME, field:NAME, number:N or none.");
    expect(await levels()).toMatchObject([{ name: "Second", unit: "hartree" }]);
  });

  it("has a field for what was asked of the files, filled with the answer; left empty it is asked again", async () => {
    const water = ["O 0.0000 0.0000 0.1173", "H 0.0000 0.7572 -0.4692", "H 0.0000 -0.7572 -0.4692"];
    const content = frame("a", BUTANE) + frame("b", water);
    const taken = await takenIn(lab.token, [{ name: "both.xyz", content }]);
    const answers = [{ id: "group", option: "frame:2" }];
    expect((await post(lab.token, `/ensembles/${taken.id}/answers`, { answers })).status).toBe(200);
    const path = `/ensembles/${taken.id}/intake`;
    const page = await (await call(path, { cookie: analyst.cookie })).text();
    expect(page).toMatch(/name="answer:group">.*<option value="frame:2" selected=""/);
    const again = (option: string) =>
      call(path, { cookie: analyst.cookie, form: { intent: "reread", "answer:group": option } });
    const intake = () => loadIntake({ actor: personOf(analyst.id), ensembleId: taken.id });
    expect((await again("frame:1")).status).toBe(200);
    expect((await intake()).questions).toMatchObject([{ id: "group", answered: "frame:1" }]);
    expect((await again("")).status).toBe(200);
    expect((await intake()).questions[0]?.answered).toBeUndefined();
    expect((await again("frame:9")).status).toBe(422);
  });

  it("is not for readers", async () => {
    expect((await send(reader.cookie, { level: "Third", energyUnit: "eV" })).status).toBe(403);
    expect(await levels()).toMatchObject([{ name: "Second", unit: "hartree" }]);
  });

  it("asks again what is left empty", async () => {
    expect((await send(analyst.cookie, { level: "Second", energyUnit: "" })).status).toBe(200);
    const { questions } = await loadIntake({ actor: personOf(analyst.id), ensembleId: id });
    expect(questions.some(({ code, answered }) => code === "energy-unit" && answered === undefined)).toBe(
      true,
    );
  });
});
