import { beforeAll, describe, expect, it } from "vitest";
import { newId } from "~/db/new-id.server";
import type { EnsembleAnswer } from "~/lib/api/schemas";
import { DomainError } from "~/lib/errors";
import type { Actor } from "~/services/auth/access.server";
import { changeColumn } from "~/services/columns/change-column.server";
import { checkFormula, deriveColumn } from "~/services/columns/derive-column.server";
import { loadColumns } from "~/services/columns/load-columns.server";
import { removeColumn, restoreColumn } from "~/services/columns/remove-column.server";
import { loadLogbook } from "~/services/logbook/load-logbook.server";
import { makeMember } from "../factories/people";
import { BUTANE, formOf, frame, makeLab, takenIn } from "../factories/upload";
import { call } from "../setup/app";

let token = "";
let actor: Actor;
let reader: Actor;
let made = 0;

beforeAll(async () => {
  const lab = await makeLab();
  token = lab.token;
  actor = { kind: "user", userId: lab.analyst.id, sessionId: newId() };
  const member = await makeMember(lab.team.id, "reader");
  reader = { kind: "user", userId: member.id, sessionId: newId() };
});

/** Three frames with E_low, G_low (free, 310 K) in kcal/mol and E_high in hartree. */
async function ensemble(): Promise<EnsembleAnswer> {
  made += 1;
  const shifted = (k: number) =>
    BUTANE.map((line, a) => (a === 0 ? line.replace("0.0000", `0.0${made}${k}0`) : line));
  const text = [1, 2, 3].map((k) => frame(`E_low=${k}.5`, shifted(k))).join("");
  const one = await takenIn(token, [{ name: `a${made}.xyz`, content: text }], {
    level: "E_low",
    energyUnit: "kcal/mol",
    energyFrom: "key:E_low",
  });
  await add(one.id, "frame,G_low [kcal/mol]\n1,3\n2,4\n3,5\n", {
    energyKind: "free",
    energyTemperature: "310",
  });
  await add(one.id, "frame,E_high [hartree]\n1,-158.000\n2,-158.001\n3,NA\n");
  return one;
}

async function add(id: string, content: string, fields: Record<string, string> = {}) {
  const body = formOf([{ name: "t.csv", content }], fields);
  const response = await call(`/api/v1/ensembles/${id}/columns`, { method: "POST", token, body });
  expect(response.status).toBeLessThan(300);
  return response.json();
}

async function refusal(work: Promise<unknown>): Promise<string> {
  const error = await work.then(
    () => null,
    (thrown: unknown) => thrown,
  );
  if (!(error instanceof DomainError)) throw new Error(`not refused: ${String(error)}`);
  return error.code;
}

const named = async (id: string, name: string) =>
  (await loadColumns({ actor, ensembleId: id })).columns.find((column) => column.name === name);
const FORMULA = "E_high + (G_low - E_low)";

describe("a computed column", () => {
  it("is checked while it is written and kept with its formula, kind and unit", async () => {
    const { id } = await ensemble();
    const check = await checkFormula({ actor: reader, ensembleId: id, expression: FORMULA });
    expect(check).toMatchObject({
      kind: "energy",
      unit: "hartree",
      energyKind: "free",
      temperature: 310,
      count: 2,
      accepted: 3,
    });
    expect(check.first[0]?.value).toBeCloseTo(-158 + 1.5 / 627.509474063, 9);
    await deriveColumn({ actor, ensembleId: id, request: { name: "G_high", expression: FORMULA } });
    expect(await named(id, "G_high")).toMatchObject({
      formula: FORMULA,
      count: 2,
      missing: 1,
      energyKind: "free",
    });
    expect((await named(id, "E_low"))?.usedBy).toEqual(["G_high"]);
    const listed = await (await call(`/api/v1/ensembles/${id}`, { token })).json();
    expect(listed.levels.map((level: { name: string }) => level.name)).toContain("G_high");
  });

  it("follows its inputs when their numbers are replaced, and formulas of formulas too", async () => {
    const { id } = await ensemble();
    await deriveColumn({ actor, ensembleId: id, request: { name: "dG", expression: "G_low - E_low" } });
    await deriveColumn({ actor, ensembleId: id, request: { name: "twice", expression: "2 * dG" } });
    const value = async () =>
      (await checkFormula({ actor, ensembleId: id, expression: "twice" })).first.map((one) => one.value);
    expect(await value()).toEqual([3, 3, 3]);
    await add(id, "frame,G_low [kcal/mol]\n1,10\n2,4\n", { replace: "true", energyKind: "free" });
    expect(await value()).toEqual([17, 3]);
  });

  it("follows its inputs by id when they are renamed, and never needs itself", async () => {
    const { id } = await ensemble();
    await deriveColumn({ actor, ensembleId: id, request: { name: "dG", expression: "G_low - E_low" } });
    const low = await named(id, "G_low");
    await changeColumn({ actor, ensembleId: id, columnId: low?.id ?? "", change: { name: "G at MMFF94" } });
    await add(id, "frame,E_low [kcal/mol]\n1,0\n2,0\n3,0\n", { replace: "true" });
    const { first } = await checkFormula({ actor, ensembleId: id, expression: "dG" });
    expect(first.map((one) => one.value)).toEqual([3, 4, 5]);
    const circle = { name: "dG", expression: "dG + E_low", replace: true };
    expect(await refusal(deriveColumn({ actor, ensembleId: id, request: circle }))).toBe("invalid");
    const taken = { name: "E_low", expression: "dG + dG" };
    expect(await refusal(deriveColumn({ actor, ensembleId: id, request: taken }))).toBe("conflict");
  });

  it("is there for further frames of a batch", async () => {
    const { id } = await ensemble();
    await deriveColumn({ actor, ensembleId: id, request: { name: "double", expression: "2 * E_low" } });
    const more = BUTANE.map((line, a) => (a === 0 ? line.replace("0.0000", "0.0005") : line));
    const body = formOf([{ name: "more.xyz", content: frame("E_low=9.5", more) }], {
      energyUnit: "kcal/mol",
      level: "E_low",
      energyFrom: "key:E_low",
    });
    const response = await call(`/api/v1/ensembles/${id}/files`, { method: "POST", token, body });
    expect(response.status, await response.clone().text()).toBeLessThan(300);
    expect(await named(id, "double")).toMatchObject({ count: 4, missing: 0 });
  });
});

describe("a column that is there", () => {
  it("is renamed and its kind stated, before and after in the logbook", async () => {
    const { id } = await ensemble();
    const low = await named(id, "E_low");
    expect(low?.kindStated).toBe(false);
    const change = {
      name: "MMFF94",
      energyKind: "free" as const,
      temperature: 298.15,
      geometryLevel: "UFF",
      solvent: "water",
    };
    await changeColumn({ actor, ensembleId: id, columnId: low?.id ?? "", change });
    expect(await named(id, "MMFF94")).toMatchObject({
      id: low?.id,
      kindStated: true,
      energyKind: "free",
      temperature: 298.15,
      geometryLevel: "UFF",
      solvent: "water",
    });
    const taken = changeColumn({ actor, ensembleId: id, columnId: low?.id ?? "", change: { name: "G_low" } });
    expect(await refusal(taken)).toBe("conflict");
    const rows = JSON.stringify(await loadLogbook({ actor, ensembleId: id }));
    expect(rows).toContain("name: MMFF94 (before: E_low)");
    expect(rows).toContain("kind: free (before: electronic)");
  });

  it("is removed, unless a formula needs it, and brought back under its id", async () => {
    const { id } = await ensemble();
    await deriveColumn({ actor, ensembleId: id, request: { name: "dG", expression: "G_low - E_low" } });
    const [low, dG] = [await named(id, "G_low"), await named(id, "dG")];
    const target = { actor, ensembleId: id };
    expect(await refusal(removeColumn({ ...target, columnId: low?.id ?? "" }))).toBe("conflict");
    await removeColumn({ ...target, columnId: dG?.id ?? "" });
    await removeColumn({ ...target, columnId: low?.id ?? "" });
    const now = await loadColumns({ actor, ensembleId: id });
    expect(now.columns.map(({ name }) => name)).toEqual(["E_low", "E_high"]);
    expect(now.removed.map(({ name }) => name).sort()).toEqual(["G_low", "dG"]);
    await restoreColumn({ ...target, columnId: low?.id ?? "" });
    await restoreColumn({ ...target, columnId: dG?.id ?? "" });
    expect(await named(id, "dG")).toMatchObject({ id: dG?.id, count: 3, formula: "G_low - E_low" });
    await add(id, "frame,E_high [hartree]\n1,-1.5\n2,-1.6\n3,-1.7\n", { replace: "true" });
    expect((await loadColumns({ actor, ensembleId: id })).removed).toEqual([]);
  });

  it("is out of reach of readers and of other ensembles", async () => {
    const [one, other] = [await ensemble(), await ensemble()];
    const low = await named(one.id, "E_low");
    const columnId = low?.id ?? "";
    const change = { name: "x" };
    expect(await refusal(changeColumn({ actor: reader, ensembleId: one.id, columnId, change }))).toBe(
      "forbidden",
    );
    expect(await refusal(removeColumn({ actor: reader, ensembleId: one.id, columnId }))).toBe("forbidden");
    expect(await refusal(changeColumn({ actor, ensembleId: other.id, columnId, change }))).toBe("not-found");
    expect(await refusal(removeColumn({ actor, ensembleId: other.id, columnId }))).toBe("not-found");
    expect(await refusal(restoreColumn({ actor, ensembleId: other.id, columnId }))).toBe("not-found");
  });
});
