import { eq } from "drizzle-orm";
import { beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { sifts } from "~/db/schema.server";
import { DomainError } from "~/lib/errors";
import { HARTREE_J, JOULE_PER_CALORIE, PARTICLES_PER_MOL } from "~/lib/units";
import type { Actor } from "~/services/auth/access.server";
import { deriveColumn } from "~/services/columns/derive-column.server";
import { loadColumns } from "~/services/columns/load-columns.server";
import { columnSpan, makeLevel, makeProperty } from "~/services/columns/make-level.server";
import { loadEnsemble } from "~/services/ensembles/load-ensemble.server";
import { loadLogbook } from "~/services/logbook/load-logbook.server";
import { BUTANE, formOf, frame, makeLab, takenIn } from "../factories/upload";
import { call } from "../setup/app";

let token = "";
let actor: Actor;
let made = 0;

beforeAll(async () => {
  const lab = await makeLab("Two fields");
  token = lab.token;
  actor = { kind: "user", userId: lab.analyst.id, sessionId: newId() };
});

/** Three frames, each with an energy, a second one in hartree that its key does not say, and a dipole. */
async function ensemble() {
  made += 1;
  const text = [1, 2, 3].map((k) => {
    const atoms = BUTANE.map((line, a) => (a === 0 ? line.replace("0.0000", `0.1${made}${k}0`) : line));
    return frame(`E_low=${k}.5 E_mp2=${-158 - k / 1000} dipole[debye]=0.${k}`, atoms);
  });
  return takenIn(token, [{ name: `two${made}.xyz`, content: text.join("") }], {
    level: "low",
    energyUnit: "kcal/mol",
    energyFrom: "key:E_low",
  });
}

const named = async (ensembleId: string, name: string) =>
  (await loadColumns({ actor, ensembleId })).columns.find((column) => column.name === name);
const idOf = async (ensembleId: string, name: string) => (await named(ensembleId, name))?.id ?? "none";

async function refusal(work: Promise<unknown>) {
  const error = await work.then(
    () => null,
    (thrown: unknown) => thrown,
  );
  if (!(error instanceof DomainError)) throw new Error(`not refused: ${String(error)}`);
  return error;
}

async function comparison(id: string) {
  const response = await call(`/api/v1/ensembles/${id}/comparison?level=low&reference=MP2`, { token });
  return { status: response.status, body: await response.json() };
}

describe("a second energy of the files", () => {
  it("becomes a level in place, under its id, with what a person says of it", async () => {
    const { id } = await ensemble();
    const columnId = await idOf(id, "E_mp2");
    expect(await named(id, "E_mp2")).toMatchObject({ kind: "property", unit: null });
    expect(await columnSpan({ actor, ensembleId: id, columnId })).toEqual({
      lowest: -158.003,
      highest: -158.001,
      count: 3,
    });
    expect((await comparison(id)).status).toBe(422);
    // Sections that need levels offer it by its name.
    expect((await loadEnsemble({ actor, ensembleId: id })).maybeLevels).toContain("E_mp2");
    const stated = { name: "MP2", unit: "hartree", geometryLevel: "MMFF94", solvent: "water" } as const;
    await makeLevel({ actor, ensembleId: id, columnId, stated });
    expect(await named(id, "MP2")).toMatchObject({
      id: columnId,
      kind: "energy",
      unit: "hartree",
      energyKind: "electronic",
      kindStated: true,
      geometryLevel: "MMFF94",
      solvent: "water",
      ordinal: 2,
      count: 3,
    });
    const { body } = await comparison(id);
    // 1 and 2 kcal/mol up at the one, one and two thousandths of a hartree down at the other.
    const kcal = (HARTREE_J * PARTICLES_PER_MOL) / 1000 / JOULE_PER_CALORIE;
    expect(body.n).toBe(3);
    expect(body.max).toBeCloseTo(1 + kcal / 1000, 9);
    expect((await loadEnsemble({ actor, ensembleId: id })).maybeLevels).not.toContain("MP2");
    const log = JSON.stringify(await loadLogbook({ actor, ensembleId: id }));
    expect(log).toContain("used as: level (before: property); name: MP2 (before: E_mp2); unit: hartree");
  });

  it("stays a level when the files are read again, and takes the values of a batch", async () => {
    const { id } = await ensemble();
    const columnId = await idOf(id, "E_mp2");
    await makeLevel({ actor, ensembleId: id, columnId, stated: { name: "MP2", unit: "hartree" } });
    const answers = { energyUnit: "kcal/mol", energyFrom: "key:E_low", level: "force field" };
    const reread = await call(`/api/v1/ensembles/${id}/reread`, {
      method: "POST",
      token,
      body: JSON.stringify(answers),
      headers: { "content-type": "application/json" },
    });
    expect(reread.status, await reread.clone().text()).toBe(200);
    expect((await reread.json()).levels.map(({ name }: { name: string }) => name)).toEqual([
      "force field",
      "MP2",
    ]);
    expect(await named(id, "MP2")).toMatchObject({ id: columnId, unit: "hartree", ordinal: 2, count: 3 });
    expect(await named(id, "E_mp2")).toBeUndefined();
    const more = BUTANE.map((line, a) => (a === 0 ? line.replace("0.0000", "0.0777") : line));
    const body = formOf([{ name: "more.xyz", content: frame("E_low=4.5 E_mp2=-158.009", more) }], {
      ...answers,
    });
    const batch = await call(`/api/v1/ensembles/${id}/files`, { method: "POST", token, body });
    expect(batch.status, await batch.clone().text()).toBeLessThan(300);
    expect(await named(id, "MP2")).toMatchObject({ count: 4, missing: 0 });
    expect(await columnSpan({ actor, ensembleId: id, columnId })).toMatchObject({ lowest: -158.009 });
  });

  it("becomes a property again; a new reading leaves it one", async () => {
    const { id } = await ensemble();
    const columnId = await idOf(id, "E_mp2");
    const target = { actor, ensembleId: id, columnId };
    await makeLevel({ ...target, stated: { name: "MP2", unit: "hartree" } });
    await makeProperty(target);
    expect(await named(id, "MP2")).toMatchObject({ kind: "property", unit: "hartree", rule: "linear" });
    expect((await comparison(id)).status).toBe(422);
    const reread = await call(`/api/v1/ensembles/${id}/reread`, {
      method: "POST",
      token,
      body: JSON.stringify({ energyUnit: "kJ/mol", energyFrom: "key:E_low", level: "low" }),
      headers: { "content-type": "application/json" },
    });
    expect(reread.status).toBe(200);
    expect(await named(id, "MP2")).toMatchObject({ id: columnId, kind: "property", count: 3 });
  });
});

describe("the first energies of an ensemble", () => {
  const frames = (run: string) =>
    [1, 2].map((k) => {
      const atoms = BUTANE.map((line, a) => (a === 0 ? line.replace("0.0000", `0.2${run}${k}`) : line));
      return frame(`E_mp2=${-158 - k / 1000}`, atoms);
    });
  const askedAt = async (ensembleId: string) =>
    (await db.select({ recipe: sifts.recipe }).from(sifts).where(eq(sifts.ensembleId, ensembleId))).map(
      ({ recipe }) => recipe.level,
    );

  it("bring the sift by energies that intake could not ask for, once", async () => {
    const content = frames("1")
      .join("")
      .replaceAll(/E_mp2=.*/g, "");
    const { id } = await takenIn(token, [{ name: "none.xyz", content }]);
    expect(await askedAt(id)).toEqual([null]);
    const add = async (name: string) => {
      const body = formOf([{ name: "t.csv", content: `frame,${name} [kcal/mol]\n1,0.5\n2,0\n` }]);
      const path = `/api/v1/ensembles/${id}/columns`;
      expect((await call(path, { method: "POST", token, body })).status).toBe(201);
    };
    await add("first");
    expect((await askedAt(id)).sort()).toEqual([null, await idOf(id, "first")].sort());
    await add("second");
    expect(await askedAt(id)).toHaveLength(2);
  });

  it("may be a property that is used as a level", async () => {
    const fields = { energyFrom: "none" };
    const content = frames("2").join("").replaceAll("E_mp2", "tag=x E_mp2");
    const { id } = await takenIn(token, [{ name: "prop.xyz", content }], fields);
    const columnId = await idOf(id, "E_mp2");
    await makeLevel({ actor, ensembleId: id, columnId, stated: { name: "MP2", unit: "hartree" } });
    expect(await askedAt(id)).toContain(columnId);
  });
});

describe("what is no level", () => {
  it("is refused in words: another unit, a formula, a name that is taken", async () => {
    const { id } = await ensemble();
    const stated = { name: "X", unit: "kcal/mol" } as const;
    const dipole = { actor, ensembleId: id, columnId: await idOf(id, "dipole[debye]") };
    const wrong = await refusal(makeLevel({ ...dipole, stated }));
    expect([wrong.code, wrong.message]).toEqual([
      "invalid",
      '"dipole[debye]" is in debye, which is no unit of energy.',
    ]);
    const mp2 = { actor, ensembleId: id, columnId: await idOf(id, "E_mp2") };
    expect((await refusal(makeLevel({ ...mp2, stated: { ...stated, name: "low" } }))).code).toBe("conflict");
    const request = { name: "twice", expression: "2 * E_mp2" };
    await deriveColumn({ actor, ensembleId: id, request });
    const needed = await refusal(makeLevel({ ...mp2, stated }));
    expect(needed.message).toBe('"twice" is computed from "E_mp2" as it is. Remove it first.');
    const computed = { actor, ensembleId: id, columnId: await idOf(id, "twice") };
    expect((await refusal(makeLevel({ ...computed, stated }))).code).toBe("invalid");
    const other = (await ensemble()).id;
    expect((await refusal(makeLevel({ ...mp2, ensembleId: other, stated }))).code).toBe("not-found");
    expect((await refusal(makeProperty({ ...mp2, ensembleId: other }))).code).toBe("not-found");
  });
});
