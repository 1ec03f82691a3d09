import { and, asc, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { batches, columns, frameBlocks, frames, logbook } from "~/db/schema.server";
import { unpackColumn } from "~/lib/column-data";
import { makeMember, tokenOf } from "../factories/people";
import { storedRows } from "../factories/stored";
import {
  BUTANE,
  formOf,
  frame,
  makeLab,
  post,
  reference,
  type Sent,
  sifted,
  takenIn,
  withJobs,
} from "../factories/upload";
import { call } from "../setup/app";

let lab: Awaited<ReturnType<typeof makeLab>>;
let token: string;
let jobs: Awaited<ReturnType<typeof withJobs>>;
beforeAll(async () => {
  jobs = await withJobs();
  lab = await makeLab();
  ({ token } = lab);
});
afterAll(() => jobs.stop());

const add = (id: string, files: Sent[], fields: Record<string, string> = {}, by = token) =>
  call(`/api/v1/ensembles/${id}/files`, { method: "POST", token: by, body: formOf(files, fields) });

async function added(id: string, files: Sent[], fields: Record<string, string> = {}) {
  const response = await add(id, files, fields);
  const body = await response.json();
  if (response.status !== 201) throw new Error(`${response.status}: ${JSON.stringify(body)}`);
  return body;
}

const ensemble = async (id: string) => (await call(`/api/v1/ensembles/${id}`, { token })).json();

/** Butane moved along x, so that every frame has coordinates of its own. */
const butane = (comment: string, by = 0) =>
  frame(
    comment,
    BUTANE.map((line) => {
      const [symbol, x, y, z] = line.split(/\s+/);
      return `${symbol} ${(Number(x) + by).toFixed(4)} ${y} ${z}`;
    }),
  );
const fields = { level: "A", energyUnit: "kcal/mol" };

async function values(ensembleId: string, name: string, count: number) {
  const [row] = await db
    .select()
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.name, name)));
  const { values: numbers, present } = unpackColumn(row?.data ?? Buffer.alloc(0), count);
  return [...numbers].map((value, k) => (present[k] === 1 ? value : null));
}

describe("POST /ensembles/:id/files", () => {
  it("numbers frames on, takes number, unit and level of the ensemble, and extends all columns", async () => {
    const first = butane("energy=-1.5 dipole=0.1") + butane("energy=-1.4 dipole=0.2", 0.1);
    const taken = await takenIn(token, [{ name: "one.xyz", content: first }], {
      ...fields,
      energyFrom: "key:energy",
    });
    const second =
      butane("energy=-1.3 dipole=0.3 rg=2.5", 0.2) + butane("energy=-1.2", 0.3) + butane("no number", 0.4);
    const body = await added(taken.id, [{ name: "two.xyz", content: second }], { name: "Night run" });
    expect(body.intake).toMatchObject({ frames: 5, accepted: 5, held: 0 });
    expect(body.levels).toMatchObject([{ id: taken.levels[0]?.id, name: "A", count: 4, missing: 1 }]);
    expect(body.files).toMatchObject([
      { name: "one.xyz", frames: 2, batch: 1 },
      { name: "two.xyz", frames: 3, batch: 2 },
    ]);
    expect(await values(taken.id, "A", 5)).toEqual([-1.5, -1.4, -1.3, -1.2, null]);
    expect(await values(taken.id, "dipole", 5)).toEqual([0.1, 0.2, 0.3, null, null]);
    expect(await values(taken.id, "rg", 5)).toEqual([null, null, 2.5, null, null]);
    const missing = body.intake.messages.find((message: { code: string }) => message.code === "E10");
    expect(missing).toMatchObject({ file: "two.xyz", frame: 5 });
    const rows = await db
      .select()
      .from(frames)
      .where(eq(frames.ensembleId, taken.id))
      .orderBy(asc(frames.number));
    expect(rows.map(({ number, file, shape, indexInShape }) => [number, file, shape, indexInShape])).toEqual([
      [1, 0, 0, 0],
      [2, 0, 0, 1],
      [3, 1, 0, 2],
      [4, 1, 0, 3],
      [5, 1, 0, 4],
    ]);
    const [entry] = await db
      .select()
      .from(logbook)
      .where(and(eq(logbook.ensembleId, taken.id), eq(logbook.type, "batch")));
    expect(entry?.data).toMatchObject({ batch: 2, name: "Night run", added: { frames: 3, accepted: 3 } });
    const positions = await call(`/files/ensembles/${taken.id}/coordinates?frames=1,4`, {
      cookie: lab.analyst.cookie,
    });
    const doubles = new Float64Array(await positions.arrayBuffer());
    expect((doubles[42] ?? 0) - (doubles[0] ?? 0)).toBeCloseTo(0.3, 10);
  });

  it("without energies names each of its frames", async () => {
    const taken = await takenIn(token, [{ name: "a.xyz", content: butane("-1.5 bare") }], fields);
    const content = butane("no number", 0.1) + butane("none here", 0.2);
    const { intake } = await added(taken.id, [{ name: "b.xyz", content }]);
    const missing = intake.messages.filter(({ code }: { code: string }) => code === "E10");
    expect(missing.map(({ frame, line }: { frame: number; line: number }) => [frame, line])).toEqual([
      [2, 2],
      [3, 18],
    ]);
    expect(intake.remarked).toBe(2);
  });

  it("answers the same bytes with 200 and adds nothing, those of the first upload too", async () => {
    const one = { name: "a.xyz", content: butane("-1.5 same") };
    const two = { name: "b.xyz", content: butane("-1.4 same", 0.1) };
    const taken = await takenIn(token, [one], fields);
    await added(taken.id, [two]);
    const before = await storedRows();
    for (const file of [one, two]) {
      const again = await add(taken.id, [file], fields);
      expect(again.status).toBe(200);
      expect((await again.json()).intake.frames).toBe(2);
    }
    expect(await storedRows()).toEqual(before);
    const other = await add(taken.id, [one], { ...fields, energyUnit: "hartree" });
    expect(other.status).toBe(409);
    expect(await other.json()).toMatchObject({ existing: taken.id });
  });

  it("knows the first upload of an ensemble that has no row for it yet", async () => {
    const one = { name: "a.xyz", content: butane("-1.5 backfill") };
    const taken = await takenIn(token, [one], fields);
    await db.delete(batches).where(eq(batches.ensembleId, taken.id));
    expect((await add(taken.id, [one])).status).toBe(200);
    await added(taken.id, [{ name: "b.xyz", content: butane("-1.4 backfill", 0.1) }]);
    const rows = await db
      .select()
      .from(batches)
      .where(eq(batches.ensembleId, taken.id))
      .orderBy(asc(batches.batch));
    expect(rows.map(({ batch }) => batch)).toEqual([0, 1]);
  });

  it("holds another molecule and puts its frames beside those held before", async () => {
    const water = (by: number) =>
      frame("0.5", [`O ${by} 0 0.12`, `H ${by} 0.76 -0.47`, `H ${by} -0.76 -0.47`]);
    const taken = await takenIn(
      token,
      [{ name: "a.xyz", content: butane("-1.5 mix") + water(0) + butane("-1.4", 0.2) }],
      fields,
    );
    const body = await added(taken.id, [
      { name: "b.xyz", content: water(1) + butane("-1.3", 0.3) + water(2) },
    ]);
    expect(body.intake).toMatchObject({ frames: 6, accepted: 3, held: 3 });
    const holds = body.intake.messages.filter((message: { code: string }) => message.code === "X12");
    expect(holds.map((message: { frame: number }) => message.frame)).toEqual([2, 4, 6]);
    const rows = await db
      .select()
      .from(frames)
      .where(eq(frames.ensembleId, taken.id))
      .orderBy(asc(frames.number));
    expect(rows.map(({ shape, indexInShape }) => [shape === 0, indexInShape])).toEqual([
      [true, 0],
      [false, 0],
      [true, 1],
      [false, 0],
      [true, 2],
      [false, 1],
    ]);
    const blocks = await db.select().from(frameBlocks).where(eq(frameBlocks.ensembleId, taken.id));
    expect(blocks.filter(({ shape }) => shape === 0).map(({ first, count }) => [first, count])).toEqual([
      [0, 2],
      [2, 1],
    ]);
    // A batch of nothing but another molecule is kept, held.
    const foreign = await added(taken.id, [{ name: "c.xyz", content: water(3) }]);
    expect(foreign.intake).toMatchObject({ frames: 7, accepted: 3, held: 4 });
  });

  it("takes another unit that stands beside the number, and asks where values lie elsewhere", async () => {
    const taken = await takenIn(
      token,
      [{ name: "a.xyz", content: butane("E = -157.1 hartree") + butane("E = -157.2 hartree", 0.1) }],
      { level: "B" },
    );
    const body = await added(taken.id, [{ name: "b.xyz", content: butane("E = -98583.0 kcal/mol", 0.2) }]);
    expect(body.levels).toMatchObject([{ name: "B", unit: "hartree", count: 3 }]);
    expect((await values(taken.id, "B", 3))[2]).toBeCloseTo(-98583 / 627.509474063, 9);
    const remarks = body.intake.messages.map((message: { message: string }) => message.message).join(" ");
    expect(remarks).toContain("converted from kcal/mol to hartree");
    const before = await storedRows();
    const unclear = await add(taken.id, [{ name: "c.xyz", content: butane("E = -98583.0", 0.3) }]);
    expect(unclear.status).toBe(422);
    expect((await unclear.json()).errors).toMatchObject([{ field: "energyUnit" }]);
    expect(await storedRows()).toEqual(before);
    const alike = await added(taken.id, [{ name: "d.xyz", content: butane("E = -157.15", 0.4) }]);
    expect(alike.levels).toMatchObject([{ count: 4 }]);
  });

  it("says which numbers there are where none is named and the files are not alike", async () => {
    const taken = await takenIn(token, [{ name: "a.xyz", content: butane("energy=-1.5 unlike") }], fields);
    const unclear = await add(taken.id, [{ name: "b.xyz", content: butane("emm=-1.5 eqm=-2.5", 0.1) }]);
    const problem = await unclear.json();
    expect([unclear.status, problem.errors?.[0]?.field]).toEqual([422, "energyFrom"]);
    const named = await added(taken.id, [{ name: "b.xyz", content: butane("emm=-1.5 eqm=-2.5", 0.1) }], {
      energyFrom: "key:emm",
    });
    expect(named.levels).toMatchObject([{ name: "A", count: 2 }]);
  });

  it("makes a further level where one is named", async () => {
    const taken = await takenIn(token, [{ name: "a.xyz", content: butane("energy=-1.5 level") }], fields);
    const body = await added(taken.id, [{ name: "b.xyz", content: butane("energy=-2.5 level", 0.1) }], {
      level: "C",
      energyUnit: "kJ/mol",
    });
    expect(body.levels).toMatchObject([
      { name: "A", count: 1, missing: 1 },
      { name: "C", unit: "kJ/mol", count: 1, missing: 1 },
    ]);
  });

  it("keeps decisions and finds the batch again when the files are read again", async () => {
    const taken = await takenIn(
      token,
      [{ name: "a.xyz", content: butane("energy=-1.5 reread") + butane("energy=-1.4", 0.1) }],
      fields,
    );
    await added(taken.id, [
      { name: "b.xyz", content: butane("energy=-1.3 reread", 0.2) + butane("energy=-1.2", 0.3) },
    ]);
    await post(token, `/ensembles/${taken.id}/frames/4/hold`, { reason: "no minimum" });
    const again = await post(token, `/ensembles/${taken.id}/reread`, {
      level: "Z",
      energyUnit: "kJ/mol",
      energyFrom: "key:energy",
    });
    expect(again.status).toBe(200);
    const body = await again.json();
    expect(body.intake).toMatchObject({ frames: 4, accepted: 3, held: 1 });
    expect(body.levels).toMatchObject([{ name: "Z", unit: "kJ/mol", count: 3 }]);
    expect(body.files.map((file: { batch: number }) => file.batch)).toEqual([1, 2]);
    expect(await values(taken.id, "Z", 4)).toEqual([-1.5, -1.4, -1.3, -1.2]);
  });

  it("refuses while number, unit or level are open, and who may not take in", async () => {
    const open = await takenIn(token, [{ name: "q.xyz", content: butane("ea=-1.5 eb=-2.5 open") }], {
      level: "A",
      energyUnit: "eV",
    });
    const refused = await add(open.id, [{ name: "b.xyz", content: butane("ea=-1.4 eb=-2.4", 0.1) }]);
    expect(refused.status).toBe(409);
    const reader = await makeMember(lab.team.id, "reader");
    const readers = await tokenOf(reader.id, lab.team.id);
    expect((await add(open.id, [{ name: "b.xyz", content: "x" }], {}, readers)).status).toBe(403);
    const form = await call(`/api/v1/ensembles/${open.id}/files`, { method: "POST", token, body: "x" });
    expect(form.status).toBe(415);
    const taken = await takenIn(token, [{ name: "e.xyz", content: butane("-1.5 fields") }], fields);
    const before = await storedRows();
    expect((await add(taken.id, [])).status).toBe(422);
    expect((await add(taken.id, [{ name: "b.xyz", content: "no structure" }])).status).toBe(422);
    expect(
      (await add(taken.id, [{ name: "b.xyz", content: butane("-1.4", 0.1) }], { series: "S" })).status,
    ).toBe(422);
    expect(await storedRows()).toEqual(before);
  });

  it("does not mix batches that come at the same moment", async () => {
    const taken = await takenIn(token, [{ name: "a.xyz", content: butane("-1.5 race") }], fields);
    const several = [1, 2, 3].map((k) =>
      add(taken.id, [
        { name: `b${k}.xyz`, content: [0, 1, 2].map((n) => butane(`-${k}.${n}`, k + 0.1 * n)).join("") },
      ]),
    );
    for (const response of await Promise.all(several)) expect(response.status).toBe(201);
    const body = await ensemble(taken.id);
    expect(body.intake).toMatchObject({ frames: 10, accepted: 10 });
    expect(body.files.map((file: { batch: number }) => file.batch)).toEqual([1, 2, 3, 4]);
    const numbers = await values(taken.id, "A", 10);
    const groups = [numbers.slice(1, 4), numbers.slice(4, 7), numbers.slice(7)];
    for (const group of groups) {
      const whole = Math.trunc(group[0] ?? 0);
      expect(group).toEqual([0, 1, 2].map((n) => Number(`${whole}.${n}`)));
    }
    // Coordinates lie where the frames say: x of the first atom tells which they are.
    const positions = await call(`/files/ensembles/${taken.id}/coordinates?frames=2,3,4,5,6,7,8,9,10`, {
      cookie: lab.analyst.cookie,
    });
    const doubles = new Float64Array(await positions.arrayBuffer());
    numbers.slice(1).forEach((value, k) => {
      const [batch, n] = String(value).slice(1).split(".");
      expect((doubles[42 * k] ?? 0) + 1.948).toBeCloseTo(Number(batch) + 0.1 * Number(n ?? 0), 6);
    });
  });

  it("takes SDF into an ensemble of XYZ and tells in the sift which search found what", async () => {
    const all = reference("ensembles/tosylamide.sdf")
      .toString()
      .split(/(?<=\$\$\$\$\n)/)
      .filter((part) => part.trim() !== "");
    const sdf = (from: number, to: number) => all.slice(from, to).join("");
    const from = { energyFrom: "field:MMFF94_ENERGY_KCAL_MOL", level: "MMFF94" };
    const whole = await takenIn(token, [{ name: "whole.sdf", content: sdf(0, 400) }], from);
    const parts = await takenIn(token, [{ name: "one.sdf", content: sdf(0, 150) }], from);
    // The second is told nothing: number, unit and level are those of the first.
    await added(parts.id, [{ name: "two.sdf", content: sdf(150, 400) }]);
    const [a, b] = [
      await sifted(token, whole.id, { level: "MMFF94" }),
      await sifted(token, parts.id, { level: "MMFF94" }),
    ];
    const plain = (kept: typeof a) => kept.result?.kept.map(({ foundIn: _, ...one }) => one);
    expect(plain(b)).toEqual(plain(a));
    expect(a.result?.kept.every((one) => one.foundIn === undefined)).toBe(true);
    for (const one of b.result?.kept ?? []) {
      const total = one.foundIn?.reduce((sum, { found }) => sum + found, 0);
      expect(total).toBe(one.found);
    }
    const batchesSeen = new Set(
      b.result?.kept.flatMap((one) => one.foundIn?.map(({ batch }) => batch) ?? []),
    );
    expect([...batchesSeen].sort()).toEqual([1, 2]);
  });
});
