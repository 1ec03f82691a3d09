import { and, asc, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { jobs, logbook, sifts } from "~/db/schema.server";
import { listEnsembles } from "~/services/ensembles/list-ensembles.server";
import { findSiftsOf } from "~/services/sifts/find-sift.server";
import { loadSift } from "~/services/sifts/load-sift.server";
import { frame, makeLab, post, reference, sifted, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let token: string;
let ensembleId: string;
let levelId: string;
const actor = () => ({ kind: "user" as const, userId: lab.analyst.id, sessionId: "x" });

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab();
  ({ token } = lab);
  const file = { name: "ac-ala.xyz", content: reference("ensembles/ac-ala-nhme.xyz") };
  const taken = await takenIn(token, [file], { level: "MMFF94", energyUnit: "kcal/mol" });
  ensembleId = taken.id;
  levelId = taken.levels[0]?.id ?? "";
});
afterAll(() => runner.stop());

const ask = (request: object, id = ensembleId) => post(token, `/ensembles/${id}/sifts`, request);
const get = (path: string) => call(`/api/v1${path}`, { token });

describe("a sift", () => {
  it("is asked for by itself after intake, with every default", async () => {
    const rows = await db
      .select()
      .from(sifts)
      .where(eq(sifts.ensembleId, ensembleId))
      .orderBy(asc(sifts.createdAt));
    expect(rows[0]?.recipe).toEqual({
      version: 1,
      level: levelId,
      levelName: "MMFF94",
      window: null,
      energyTolerance: 0.15,
      rmsdTolerance: 0.2,
      atoms: "heavy+polarH",
      symmetry: true,
      mirror: "keep",
      chirality: "chiral",
      chiralityOverridden: false,
    });
  });

  it("answers 202 with its address; the same recipe by name, id or in full is the same sift", async () => {
    const first = await ask({ level: "MMFF94" });
    expect(first.status).toBe(202);
    const { id } = await first.json();
    expect(first.headers.get("location")).toBe(`/api/v1/sifts/${id}`);
    for (const same of [
      { level: levelId },
      {
        level: "MMFF94",
        mirror: "auto",
        chirality: "auto",
        atoms: "heavy+polarH",
        symmetry: true,
        window: null,
      },
      { level: "MMFF94", energyTolerance: 0.15, rmsdTolerance: 0.2 },
    ]) {
      expect((await (await ask(same)).json()).id).toBe(id);
    }
    const answers = await Promise.all(
      Array.from({ length: 5 }, async () => (await ask({ level: "MMFF94", rmsdTolerance: 0.31 })).json()),
    );
    expect(new Set(answers.map((answer) => answer.id)).size).toBe(1);
  });

  it("asked for again, is the one that pages show where no other is named", async () => {
    const first = (await (await ask({ level: "MMFF94", rmsdTolerance: 0.27 })).json()).id;
    const second = (await (await ask({ level: "MMFF94", rmsdTolerance: 0.28 })).json()).id;
    const newest = async () => (await findSiftsOf([ensembleId]))[0]?.id;
    expect(await newest()).toBe(second);
    const recipes = () =>
      db
        .select({ data: logbook.data })
        .from(logbook)
        .where(and(eq(logbook.ensembleId, ensembleId), eq(logbook.type, "sift")))
        .orderBy(asc(logbook.id));
    const before = (await recipes()).length;
    expect((await (await ask({ level: "MMFF94", rmsdTolerance: 0.27 })).json()).id).toBe(first);
    expect(await newest()).toBe(first);
    // It is the set of everybody from now on, so the logbook says who went back; asked twice, once.
    await ask({ level: "MMFF94", rmsdTolerance: 0.27 });
    const entries = await recipes();
    expect(entries).toHaveLength(before + 1);
    expect(entries.at(-1)?.data).toMatchObject({
      siftId: first,
      back: true,
      recipe: { rmsdTolerance: 0.27 },
    });
  });

  it("accounts for every frame exactly once", async () => {
    const held = await takenIn(
      token,
      [
        {
          name: "h.xyz",
          content: `${reference("ensembles/ac-ala-nhme.xyz")}${frame("energy=-3", ["He 0 0 0"])}`,
        },
      ],
      { level: "MMFF94", energyUnit: "kcal/mol" },
    );
    const sift = await sifted(token, held.id, { level: "MMFF94", window: 2, atoms: "heavy" });
    expect(sift.status).toBe("done");
    expect(sift.progress).toBe(1);
    const result = sift.result;
    const all = [
      ...(result?.kept ?? []).map((one) => one.frame),
      ...(result?.dropped ?? []).map((one) => one.frame),
      ...(result?.held ?? []).map((one) => one.frame),
      ...(result?.outsideWindow ?? []),
      ...(result?.withoutEnergy ?? []),
    ].sort((a, b) => a - b);
    expect(all).toEqual(Array.from({ length: 301 }, (_, k) => k + 1));
    expect(result?.held).toMatchObject([{ frame: 301, reason: expect.stringContaining("composition") }]);
    expect(result?.kept.reduce((sum, one) => sum + one.found, 0)).toBe(
      (result?.kept.length ?? 0) + (result?.dropped.length ?? 0),
    );
    expect(result?.kept.every((one) => (one.relativeEnergy ?? 9) <= 2)).toBe(true);
  });

  it("without energies walks in file order and has no populations", async () => {
    const sift = await sifted(token, ensembleId, { level: null });
    expect(sift.result?.kept[0]).toMatchObject({ frame: 1, relativeEnergy: null });
    expect(sift.recipe).toMatchObject({ level: null, energyTolerance: null });
    expect((await get(`/sifts/${sift.id}/populations`)).status).toBe(422);
  });

  it.each([
    [{}, "level"],
    [{ level: "B3LYP" }, "level"],
    [{ level: "MMFF94", window: -1 }, "window"],
    [{ level: "MMFF94", window: "3" }, "window"],
    [{ level: null, window: 3 }, "window"],
    [{ level: "MMFF94", rmsdTolerance: -1 }, "rmsdTolerance"],
    [{ level: "MMFF94", rmsdTolerance: null }, "rmsdTolerance"],
    [{ level: "MMFF94", atoms: "carbon" }, "atoms"],
    [{ level: "MMFF94", mirror: "merge" }, "mirror"],
    [{ level: "MMFF94", speed: "fast" }, "speed"],
    [{ level: "MMFF94", status: "done" }, "status"],
  ])("is refused with the field at fault: %j", async (request, field) => {
    const response = await ask(request);
    expect(response.status).toBe(422);
    expect((await response.json()).errors).toMatchObject([{ field }]);
  });

  it("becomes out of date with a hold and current again with the release", async () => {
    const { id } = await (await ask({ level: "MMFF94" })).json();
    await get(`/sifts/${id}?wait=60`);
    const current = async () => (await (await get(`/sifts/${id}`)).json()).current;
    expect(await current()).toBe(true);
    await post(token, `/ensembles/${ensembleId}/frames/6/hold`, { reason: "to see" });
    expect(await current()).toBe(false);
    const other = await sifted(token, ensembleId, { level: "MMFF94" });
    expect(other.id).not.toBe(id);
    expect(other.result?.held).toEqual([{ frame: 6, reason: "to see" }]);
    expect((await loadSift({ actor: actor(), ensembleId }))?.id).toBe(other.id);
    await post(token, `/ensembles/${ensembleId}/frames/6/release`, { reason: "seen" });
    expect(await current()).toBe(true);
    expect((await (await ask({ level: "MMFF94" })).json()).id).toBe(id);
  });

  it("that failed or was cancelled runs again when it is asked for again", async () => {
    for (const state of ["failed", "cancelled"] as const) {
      const request = { level: "MMFF94", rmsdTolerance: state === "failed" ? 0.21 : 0.22 };
      const sift = await sifted(token, ensembleId, request);
      const [row] = await db.select().from(sifts).where(eq(sifts.id, sift.id));
      await db
        .update(jobs)
        .set({ state, error: "a test" })
        .where(eq(jobs.id, row?.jobId ?? ""));
      const shown = await (await get(`/sifts/${sift.id}`)).json();
      expect(shown).toMatchObject({ status: state, result: null });
      expect((await get(`/sifts/${sift.id}/populations`)).status).toBe(409);
      expect((await get(`/sifts/${sift.id}/export.csv`)).status).toBe(409);
      const again = await sifted(token, ensembleId, request);
      expect(again).toMatchObject({ id: sift.id, status: "done" });
      expect(again.result?.kept).toEqual(sift.result?.kept);
    }
  });

  it("shows in the table of ensembles with its shares", async () => {
    const sift = await loadSift({ actor: actor(), ensembleId });
    await get(`/sifts/${sift?.id}?wait=60`);
    const rows = await listEnsembles({ actor: actor(), teamId: lab.team.id });
    const row = rows.find((one) => one.id === ensembleId);
    expect(row).toMatchObject({
      formula: "C6H12N2O2",
      frames: 300,
      levels: [{ name: "MMFF94", ordinal: 1 }],
    });
    expect(row?.sift?.distinct).toBe(7);
    expect(row?.sift?.shares.reduce((sum, share) => sum + share, 0)).toBeCloseTo(1, 12);
    expect(row?.sift?.lowest).toBeCloseTo(0.5224, 4);
  });
});

describe("GET /sifts/:id?wait=", () => {
  it.each(["-1", "abc", "0x1", " 1"])("refuses wait=%s", async (wait) => {
    const { id } = await (await ask({ level: "MMFF94" })).json();
    expect((await get(`/sifts/${id}?wait=${encodeURIComponent(wait)}`)).status).toBe(422);
  });

  it.each(["", "0", "0.5", "60", "61", "1e9"])("takes wait=%s", async (wait) => {
    const { id } = await (await ask({ level: "MMFF94" })).json();
    await get(`/sifts/${id}?wait=60`);
    expect((await get(`/sifts/${id}?wait=${wait}`)).status).toBe(200);
  });
});

describe("populations", () => {
  let id: string;
  beforeAll(async () => {
    ({ id } = await sifted(token, ensembleId, { level: "MMFF94" }));
  });

  it("say which weights were taken and why, and sum to 1", async () => {
    const auto = await (await get(`/sifts/${id}/populations`)).json();
    expect(auto).toMatchObject({
      temperature: 298.15,
      level: levelId,
      levelName: "MMFF94",
      weights: "copies",
    });
    const sum = auto.conformers.reduce((all: number, one: { population: number }) => all + one.population, 0);
    expect(Math.abs(sum - 1)).toBeLessThan(1e-12);
    expect(auto.effectiveCount).toBeCloseTo(Math.exp(auto.entropy / 1.98720425864), 9);
    const chosen = await (
      await get(`/sifts/${id}/populations?weights=degeneracy&level=MMFF94&colour=blue`)
    ).json();
    expect(chosen.weights).toBe("degeneracy");
  });

  it("take degeneracy for free energies", async () => {
    const content = `${reference("ensembles/difluoroethane.xyz")}`;
    const taken = await takenIn(token, [{ name: "free.xyz", content }], {
      level: "G",
      energyUnit: "kcal/mol",
      energyKind: "free",
    });
    const sift = await sifted(token, taken.id, { level: "G" });
    const found = await (await get(`/sifts/${sift.id}/populations`)).json();
    expect(found.weights).toBe("degeneracy");
    expect(found.conformers.map((one: { weight: number }) => one.weight)).toEqual([2, 1]);
  });

  it.each([
    "temperature=0",
    "temperature=-5",
    "temperature=abc",
    "temperature=1e",
    "weights=heavy",
    "level=None",
  ])("refuse %s", async (query) => {
    const response = await get(`/sifts/${id}/populations?${query}`);
    expect(response.status).toBe(422);
    expect((await response.json()).errors).toMatchObject([{ field: query.split("=")[0] }]);
  });

  it("of a level with gaps name the kept frames that are left out", async () => {
    const content = frame("a=-1.5 b=-1.0") + frame("a=-1.4", SECOND) + frame("a=-0.2 b=-1.6", THIRD);
    const taken = await takenIn(token, [{ name: "gaps.xyz", content }], {
      level: "A",
      energyUnit: "kcal/mol",
      energyFrom: "key:b",
    });
    const sift = await sifted(token, taken.id, { level: "A", atoms: "all", rmsdTolerance: 0.01 });
    expect(sift.result?.withoutEnergy).toEqual([2]);
    expect(sift.result?.kept.map((one) => one.frame)).toEqual([3, 1]);
    const found = await (await get(`/sifts/${sift.id}/populations`)).json();
    expect(found.conformers.map((one: { frame: number }) => one.frame)).toEqual([3, 1]);
    expect(found.conformers[1].relativeEnergy).toBeCloseTo(0.6, 12);
  });
});

describe("exports", () => {
  it("come as attachments under the ensemble's name, and the XYZ reads back to the same frames", async () => {
    const sift = await sifted(token, ensembleId, { level: "MMFF94" });
    const xyz = await get(`/sifts/${sift.id}/export.xyz`);
    expect(xyz.headers.get("content-disposition")).toContain(
      'attachment; filename="ac-ala distinct set.xyz"',
    );
    expect(xyz.headers.get("x-content-type-options")).toBe("nosniff");
    const text = await xyz.text();
    const other = await makeLab();
    const back = await takenIn(other.token, [{ name: "back.xyz", content: text }], {
      level: "MMFF94",
      energyFrom: "key:energy",
    });
    expect(back.intake).toMatchObject({ frames: 7, accepted: 7 });
    expect(back.levels).toMatchObject([{ unit: "kcal/mol", count: 7 }]);
    const again = await sifted(other.token, back.id, { level: "MMFF94" });
    expect(again.result?.kept.map((one) => one.relativeEnergy)).toEqual(
      sift.result?.kept.map((one) => one.relativeEnergy),
    );
  });

  it("CSV has the fixed columns, then the ensemble's own, and no cell that a spreadsheet runs", async () => {
    const comment = (label: string, energy: string) =>
      `Properties=species:S:1:pos:R:3 name="${label}" energy=${energy} mu=1.25`;
    const content = frame(comment("=HYPERLINK(1)", "-1.5")) + frame(comment("+2", "-1.0"), SECOND);
    const taken = await takenIn(token, [{ name: "csv.xyz", content }], {
      level: "=A",
      energyUnit: "kcal/mol",
      energyFrom: "key:energy",
    });
    const sift = await sifted(token, taken.id, { level: "=A", atoms: "all", rmsdTolerance: 0.01 });
    const csv = await (await get(`/sifts/${sift.id}/export.csv?temperature=310`)).text();
    const lines = csv.split("\r\n");
    expect(lines[0]).toBe(
      "frame,label,relativeEnergy,degeneracy,symmetryNumber,copies,found,population,'=A [kcal/mol],mu",
    );
    expect(lines[1]).toMatch(/^1,'=HYPERLINK\(1\),0,/);
    expect(lines[2]).toMatch(/^2,'\+2,0.5,/);
    const populations = lines.slice(1, 3).map((line) => Number(line.split(",")[7]));
    const from = await (await get(`/sifts/${sift.id}/populations?temperature=310`)).json();
    expect(populations).toEqual(from.conformers.map((one: { population: number }) => one.population));
  });

  it("JSON carries recipe, sources and units", async () => {
    const sift = await sifted(token, ensembleId, { level: "MMFF94" });
    const body = await (await get(`/sifts/${sift.id}/export.json`)).json();
    expect(body).toMatchObject({ recipe: sift.recipe, weights: "copies", temperature: 298.15 });
    expect(body.sources).toMatchObject([{ name: "ac-ala.xyz", frames: 300 }]);
    expect(body.conformers.map((one: { frame: number }) => one.frame)).toEqual(
      sift.result?.kept.map((one) => one.frame),
    );
  });

  it("refuse a bad temperature, and stand in the logbook", async () => {
    const sift = await sifted(token, ensembleId, { level: "MMFF94" });
    expect((await get(`/sifts/${sift.id}/export.sdf`)).status).toBe(200);
    expect((await get(`/sifts/${sift.id}/export.csv?temperature=x`)).status).toBe(422);
    const rows = await db
      .select({ type: logbook.type })
      .from(logbook)
      .where(eq(logbook.ensembleId, ensembleId));
    expect(rows.map((row) => row.type)).toContain("export");
  });
});

// Butane with its first methyl group turned, and with a torsion of 60 degrees less: shapes of our own.
const SECOND = turned(0.5);
const THIRD = turned(1.1);

/** The first methyl group turned about the bond to it, by an angle in radians: other coordinates, the same molecule. */
function turned(angle: number): string[] {
  const rows = frame("")
    .trim()
    .split("\n")
    .slice(2)
    .map((line) => line.split(" "));
  const at = (k: number) => (rows[k] ?? []).slice(1).map(Number) as [number, number, number];
  const [a, b] = [at(1), at(0)];
  const axis = b.map((x, k) => x - (a[k] ?? 0));
  const length = Math.hypot(...axis);
  const [x, y, z] = axis.map((one) => one / length) as [number, number, number];
  const [c, s] = [Math.cos(angle), Math.sin(angle)];
  return rows.map((row, k) => {
    if (![4, 5, 6].includes(k)) return row.join(" ");
    const [px, py, pz] = at(k).map((one, axisOf) => one - (a[axisOf] ?? 0)) as [number, number, number];
    const dot = (x * px + y * py + z * pz) * (1 - c);
    const turnedBy = [
      px * c + (y * pz - z * py) * s + x * dot,
      py * c + (z * px - x * pz) * s + y * dot,
      pz * c + (x * py - y * px) * s + z * dot,
    ];
    return ["H", ...turnedBy.map((one, axisOf) => (one + (a[axisOf] ?? 0)).toFixed(6))].join(" ");
  });
}
