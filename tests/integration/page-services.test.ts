import { eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { editions, ensembles, members, sifts, teams, users } from "~/db/schema.server";
import type { Actor } from "~/services/auth/access.server";
import { findToken } from "~/services/auth/find-token.server";
import { createSeries } from "~/services/ensembles/create-series.server";
import { deleteEnsemble } from "~/services/ensembles/delete-ensemble.server";
import { listEnsembles } from "~/services/ensembles/list-ensembles.server";
import { listSeries } from "~/services/ensembles/list-series.server";
import { loadEnsemble } from "~/services/ensembles/load-ensemble.server";
import { loadExample } from "~/services/ensembles/load-example.server";
import { loadIntake } from "~/services/ensembles/load-intake.server";
import { moveEnsemble, renameEnsemble } from "~/services/ensembles/rename-ensemble.server";
import { loadLogbook } from "~/services/logbook/load-logbook.server";
import { seedDemo, seedExample } from "~/services/seed/seed-demo.server";
import { seedEditions } from "~/services/seed/seed-editions.server";
import { loadSift } from "~/services/sifts/load-sift.server";
import { seedPeople } from "~/services/teams/seed-people.server";
import { createToken } from "~/services/tokens/create-token.server";
import { listTokens } from "~/services/tokens/list-tokens.server";
import { revokeToken } from "~/services/tokens/revoke-token.server";
import { makeMember } from "../factories/people";
import { storedRows } from "../factories/stored";
import { BUTANE, frame, makeLab, post, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

const person = (userId: string): Actor => ({ kind: "user", userId, sessionId: "s" });
const NOBODY: Actor = { kind: "anonymous" };

let lab: Awaited<ReturnType<typeof makeLab>>;
let actor: Actor;
let ensembleId: string;
beforeAll(async () => {
  lab = await makeLab("Estuary of tests");
  actor = person(lab.analyst.id);
  const broken = frame("b energy=-1", [...BUTANE.slice(0, 13), "H 1,5 0 0"]);
  const content = frame("a energy=-1.5") + broken + frame("c") + frame("d energy=-1.25");
  const file = { name: "four.xyz", content };
  const taken = await takenIn(lab.token, [file], { level: "M", energyUnit: "kJ/mol", series: "First" });
  ensembleId = taken.id;
});

describe("the pages of an ensemble", () => {
  it("show the molecule, its counts, levels and files", async () => {
    const view = await loadEnsemble({ actor, ensembleId });
    expect(view).toMatchObject({
      name: "four",
      formula: "C4H10",
      atoms: 14,
      frames: 4,
      accepted: 3,
      remarked: 1,
      held: 1,
      chirality: "achiral",
      team: { name: "Estuary of tests" },
      series: { name: "First" },
      levels: [{ name: "M", unit: "kJ/mol", count: 2, missing: 1, ordinal: 1, energyKind: "electronic" }],
      files: [{ position: 0, name: "four.xyz", firstFrame: 1, frames: 4 }],
      role: "analyst",
      mayCompute: true,
    });
    expect(view.elements).toHaveLength(14);
    // 13 bonds of butane, as flat pairs.
    expect(view.bonds).toHaveLength(26);
  });

  it("show every frame in the strip, and which may be released", async () => {
    const intake = await loadIntake({ actor, ensembleId });
    expect(intake.strip).toBe("ahra");
    expect(intake.held).toMatchObject([
      { number: 2, line: 17, state: "held", releasable: false, showable: false },
    ]);
    expect(intake.remarked).toMatchObject([{ number: 3, state: "remarked", showable: true }]);
    expect(intake.messages.map((message) => message.code)).toEqual(["X22", "E10", "E13"]);
  });

  it("show who did what, and to a guest of the example neither names nor what members tried", async () => {
    await post(lab.token, `/ensembles/${ensembleId}/frames/1/hold`, { reason: "<script>alert(1)</script>" });
    const { rows } = await loadLogbook({ actor, ensembleId });
    expect(rows[0]).toMatchObject({ type: "hold", by: "token", text: "Held frame 1" });
    expect(rows[0]?.who).toMatch(/^Token lowl_/);
    const told = await (await call(`/api/v1/ensembles/${ensembleId}`, { token: lab.token })).json();
    expect(told.intake.messages.at(-1)).toEqual({
      code: "by-hand",
      severity: "hold",
      file: "four.xyz",
      line: 1,
      frame: 1,
      message: "<script>alert(1)</script>",
    });
    await db.update(ensembles).set({ example: true }).where(eq(ensembles.id, ensembleId));
    expect((await loadLogbook({ actor: NOBODY, ensembleId })).rows).toEqual([]);
    const view = await loadEnsemble({ actor: NOBODY, ensembleId });
    expect(view).toMatchObject({ role: "guest", mayCompute: false });
    expect((await loadExample({ actor: NOBODY }))?.ensemble.id).toBe(ensembleId);
    await db.update(ensembles).set({ example: false }).where(eq(ensembles.id, ensembleId));
    await expect(loadEnsemble({ actor: NOBODY, ensembleId })).rejects.toMatchObject({ code: "not-found" });
    expect(await loadExample({ actor: NOBODY })).toBeNull();
    await post(lab.token, `/ensembles/${ensembleId}/frames/1/release`, { reason: "back" });
  });

  it("send source files byte for byte, as attachments, to members only (security E05)", async () => {
    const path = `/files/ensembles/${ensembleId}/sources/0`;
    const answer = await call(path, { cookie: lab.analyst.cookie });
    expect(answer.headers.get("content-disposition")).toMatch(/^attachment; filename="four.xyz"/);
    expect(answer.headers.get("content-type")).toBe("application/octet-stream");
    expect((await answer.text()).startsWith("14\na energy=-1.5\n")).toBe(true);
    expect((await call(path, {})).status).toBe(404);
    for (const position of ["1", "-1", "x", "0.0"]) {
      const missing = await call(`/files/ensembles/${ensembleId}/sources/${position}`, {
        cookie: lab.analyst.cookie,
      });
      expect(missing.status, position).toBe(404);
    }
  });

  it("show guests of the example the sift that intake started, members their newest", async () => {
    const { id } = await takenIn(lab.token, [{ name: "g.xyz", content: frame("g energy=-3") }], {
      level: "M",
      energyUnit: "kJ/mol",
    });
    const runner = await withJobs();
    const sifted = (siftId: string) => call(`/api/v1/sifts/${siftId}?wait=60`, { token: lab.token });
    const [first] = await db.select().from(sifts).where(eq(sifts.ensembleId, id));
    await sifted(first?.id ?? "");
    const asked = await post(lab.token, `/ensembles/${id}/sifts`, { level: null, rmsdTolerance: 9 });
    const { id: second } = (await asked.json()) as { id: string };
    await sifted(second);
    await runner.stop();
    await db.update(ensembles).set({ example: true }).where(eq(ensembles.id, id));
    expect((await loadSift({ actor: NOBODY, ensembleId: id }))?.id).toBe(first?.id);
    expect((await loadSift({ actor, ensembleId: id }))?.id).toBe(second);
    expect((await loadExample({ actor }))?.sift?.id).toBe(first?.id);
    await db.update(ensembles).set({ example: false }).where(eq(ensembles.id, id));
  });

  it("take a sift by its id only from their own ensemble", async () => {
    const other = await takenIn(lab.token, [{ name: "o.xyz", content: frame("e energy=-2") }], {
      level: "M",
      energyUnit: "kJ/mol",
    });
    const [sift] = await db.select().from(sifts).where(eq(sifts.ensembleId, other.id));
    expect((await loadSift({ actor, ensembleId: other.id, siftId: sift?.id }))?.id).toBe(sift?.id);
    await expect(loadSift({ actor, ensembleId, siftId: sift?.id })).rejects.toMatchObject({
      code: "not-found",
    });
  });
});

describe("series", () => {
  it("are made once a name, listed with what they hold, and take ensembles of their team only", async () => {
    const { id } = await createSeries({ actor, teamId: lab.team.id, name: "  Second " });
    await expect(createSeries({ actor, teamId: lab.team.id, name: "Second" })).rejects.toMatchObject({
      code: "conflict",
    });
    await moveEnsemble({ actor, ensembleId, seriesId: id });
    const rows = await listSeries({ actor, teamId: lab.team.id });
    expect(rows.find((row) => row.id === id)).toMatchObject({ name: "Second", ensembles: 1, frames: 4 });
    const listed = await listEnsembles({ actor, teamId: lab.team.id, series: id });
    expect(listed.map((row) => row.id)).toEqual([ensembleId]);
    const other = await makeLab();
    const foreign = await createSeries({
      actor: person(other.analyst.id),
      teamId: other.team.id,
      name: "Theirs",
    });
    await expect(moveEnsemble({ actor, ensembleId, seriesId: foreign.id })).rejects.toMatchObject({
      code: "not-found",
    });
  });
});

describe("names and deletion", () => {
  it("need their role", async () => {
    const reader = person((await makeMember(lab.team.id, "reader")).id);
    const owner = person((await makeMember(lab.team.id, "owner")).id);
    await expect(renameEnsemble({ actor: reader, ensembleId, name: "X" })).rejects.toMatchObject({
      code: "forbidden",
    });
    await renameEnsemble({ actor, ensembleId, name: " Butane, again " });
    expect((await loadEnsemble({ actor: reader, ensembleId })).name).toBe("Butane, again");
    const taken = await takenIn(lab.token, [{ name: "d.xyz", content: frame("delete energy=-3") }], {
      level: "M",
      energyUnit: "eV",
    });
    await expect(deleteEnsemble({ actor, ensembleId: taken.id })).rejects.toMatchObject({
      code: "forbidden",
    });
    await deleteEnsemble({ actor: owner, ensembleId: taken.id });
    await expect(loadEnsemble({ actor: owner, ensembleId: taken.id })).rejects.toMatchObject({
      code: "not-found",
    });
    const [sift] = await db.select().from(sifts).where(eq(sifts.ensembleId, taken.id));
    expect((await call(`/api/v1/sifts/${sift?.id}`, { token: lab.token })).status).toBe(404);
  });
});

describe("tokens", () => {
  const token = { name: "Night queue", scope: "add" as const, days: 30 };

  it("are shown once, listed by their prefix, and end at once", async () => {
    const made = await createToken({ actor, teamId: lab.team.id, token });
    expect((await findToken(made.token))?.scope).toBe("add");
    const rows = await listTokens({ actor, teamId: lab.team.id });
    const row = rows.find((one) => one.id === made.id);
    expect(row).toMatchObject({
      name: "Night queue",
      prefix: made.prefix,
      scope: "add",
      own: true,
      ended: false,
    });
    expect(JSON.stringify(rows)).not.toContain(made.token);
    await revokeToken({ actor, teamId: lab.team.id, tokenId: made.id });
    expect(await findToken(made.token)).toBeNull();
    await expect(revokeToken({ actor, teamId: lab.team.id, tokenId: made.id })).rejects.toMatchObject({
      code: "not-found",
    });
  });

  it("of readers only read; owners see and end everybody's, others their own", async () => {
    const reader = person((await makeMember(lab.team.id, "reader")).id);
    const owner = person((await makeMember(lab.team.id, "owner")).id);
    await expect(createToken({ actor: reader, teamId: lab.team.id, token })).rejects.toMatchObject({
      code: "forbidden",
    });
    const read = await createToken({
      actor: reader,
      teamId: lab.team.id,
      token: { ...token, scope: "read" },
    });
    expect((await listTokens({ actor, teamId: lab.team.id })).some((row) => row.id === read.id)).toBe(false);
    await expect(revokeToken({ actor, teamId: lab.team.id, tokenId: read.id })).rejects.toMatchObject({
      code: "not-found",
    });
    expect((await listTokens({ actor: owner, teamId: lab.team.id })).some((row) => row.id === read.id)).toBe(
      true,
    );
    await revokeToken({ actor: owner, teamId: lab.team.id, tokenId: read.id });
  });

  it("never make tokens", async () => {
    const made = await createToken({ actor, teamId: lab.team.id, token: { ...token, scope: "full" } });
    const asToken = await findToken(made.token);
    if (asToken === null) throw new Error("no token");
    await expect(createToken({ actor: asToken, teamId: lab.team.id, token })).rejects.toMatchObject({
      code: "forbidden",
    });
  });
});

describe("the demo", () => {
  let runner: Awaited<ReturnType<typeof withJobs>>;
  beforeAll(async () => {
    runner = await withJobs();
  });
  afterAll(() => runner.stop());

  it("is taken in like anybody's files, once, and shows what was held", async () => {
    await seedPeople("a password of the demo");
    await seedDemo();
    const [analyst] = await db.select().from(users).where(eq(users.email, "analyst@lowlying.example"));
    const [member] = await db
      .select()
      .from(members)
      .where(eq(members.userId, analyst?.id ?? ""));
    const demo = { actor: person(analyst?.id ?? ""), teamId: member?.teamId ?? "" };
    const rows = await listEnsembles(demo);
    expect(rows).toHaveLength(5);
    expect(new Set(rows.map((row) => row.series.name))).toEqual(new Set(["Dipeptide models", "Linkers"]));
    const night = rows.find((row) => row.name.endsWith("night run"));
    const intake = await loadIntake({ actor: demo.actor, ensembleId: night?.id ?? "" });
    // fixtures/demo/README.md: a moved hydrogen, a decimal comma, a missing energy, a lost line.
    expect(intake.held.map(({ number, holdReason }) => [number, holdReason])).toEqual([
      [7, "other-species"],
      [12, "unclear"],
      [30, "unreadable"],
    ]);
    expect(intake.remarked.map((one) => one.number)).toEqual([21]);
    const before = await storedRows();
    await seedDemo();
    expect(await storedRows()).toEqual(before);
    const example = await loadExample({ actor: NOBODY });
    const waited = await call(`/files/sifts/${example?.sift?.id}?wait=60`, {});
    expect(await waited.json()).toMatchObject({ status: "done" });
    expect((await loadExample({ actor: NOBODY }))?.sift?.result?.kept).toHaveLength(7);
    // It comes with an edition, frozen once.
    const name = "N-Acetyl-L-alanine N-methylamide";
    await seedEditions([name]);
    await seedEditions([name]);
    expect(await db.select({ title: editions.title }).from(editions)).toEqual([{ title: "First look" }]);
  });

  it("on a public server is the example alone, in a team that nobody is in", async () => {
    await db.update(ensembles).set({ example: false });
    await seedExample();
    await seedExample();
    const found = await db.select().from(ensembles).where(eq(ensembles.example, true));
    expect(found).toHaveLength(1);
    const [team] = await db
      .select()
      .from(teams)
      .where(eq(teams.id, found[0]?.teamId ?? ""));
    expect(
      await db
        .select()
        .from(members)
        .where(eq(members.teamId, team?.id ?? "")),
    ).toEqual([]);
    expect((await loadExample({ actor: NOBODY }))?.ensemble.role).toBe("guest");
  });
});
