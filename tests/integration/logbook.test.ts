import { and, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { driverCode } from "~/db/driver-errors.server";
import { logbook } from "~/db/schema.server";
import { NO_FILTER } from "~/lib/logbook/filter";
import { exportLogbook, loadLogbook, loadTeamLogbook } from "~/services/logbook/load-logbook.server";
import { writeRemark } from "~/services/logbook/write-remark.server";
import { freeze, link, makeSifted, personOf } from "../factories/editions";
import { makeMember } from "../factories/people";
import { makeEnsembleRow } from "../factories/rows";
import { makeLab, withJobs } from "../factories/upload";
import { call } from "../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let at: Awaited<ReturnType<typeof makeSifted>>;
let reader: Awaited<ReturnType<typeof makeMember>>;
const actor = () => personOf(lab.analyst.id);

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab();
  at = await makeSifted(lab);
  reader = await makeMember(lab.team.id, "reader");
  const { number } = await freeze(actor(), at, { title: "One" });
  const { secret } = await link(actor(), { ensembleId: at.ensembleId, number }, { label: "Partner lab" });
  await call(`/e/${secret}`);
});
afterAll(() => runner.stop());

const load = (filter = {}) =>
  loadLogbook({ actor: actor(), ensembleId: at.ensembleId, filter: { ...NO_FILTER, ...filter } });
const types = async (filter: object) => (await load(filter)).rows.map(({ type }) => type);

describe("the logbook", () => {
  it("takes remarks of every member, readers too, under their name; nobody can change them (G03)", async () => {
    await writeRemark({ actor: personOf(reader.id), ensembleId: at.ensembleId, text: "=1+1 looks odd" });
    const [row] = (await load({ kind: "remark" })).rows;
    expect(row).toMatchObject({ text: "“=1+1 looks odd”", by: "person", from: "browser", kind: "remark" });
    const mine = and(eq(logbook.ensembleId, at.ensembleId), eq(logbook.type, "remark"));
    for (const attempt of [
      db.update(logbook).set({ type: "x" }).where(mine),
      db.delete(logbook).where(mine),
    ]) {
      const code = await attempt.then(
        () => "done",
        (error: unknown) => driverCode(error),
      );
      expect(code).toBe("ER_SIGNAL_EXCEPTION");
    }
    const strange = await makeLab();
    const ask = writeRemark({ actor: personOf(strange.analyst.id), ensembleId: at.ensembleId, text: "x" });
    await expect(ask).rejects.toMatchObject({ code: "not-found" });
  });

  it("shows what the filters ask for", async () => {
    expect(new Set(await types({ kind: "link" }))).toEqual(new Set(["link-made", "link-opened"]));
    expect(await types({ kind: "edition" })).toEqual(["edition-frozen"]);
    expect(await types({ who: "link" })).toEqual(["link-opened"]);
    expect(new Set(await types({ who: "token" }))).toEqual(new Set(["intake", "sift"]));
    expect(await types({ who: reader.id })).toEqual(["remark"]);
    expect(await types({ text: "PARTNER opened" })).toEqual(["link-opened"]);
    expect(await types({ text: "no such word" })).toEqual([]);
    const all = await load();
    expect(await types({ when: "today" })).toHaveLength(all.total);
    expect(all.people.map(({ id }) => id).sort()).toEqual([lab.analyst.id, reader.id].sort());
  });

  it("goes on page by page", async () => {
    const all = (await load()).rows;
    const older = (await load({ before: all[1]?.id ?? 0 })).rows;
    expect(older.map(({ id }) => id)).toEqual(all.slice(2).map(({ id }) => id));
  });

  it("is a CSV whose cells no spreadsheet runs (E08)", async () => {
    const text = await exportLogbook({
      actor: personOf(reader.id),
      ensembleId: at.ensembleId,
      filter: { ...NO_FILTER, kind: "edition" },
    });
    const [head, row, end] = text.split("\r\n");
    expect(head).toBe("number,time,who,by,from,kind,ensemble,text,detail");
    expect(row).toContain(",edition,");
    expect(end).toBe("");
    const path = `/files/ensembles/${at.ensembleId}/logbook.csv?kind=remark`;
    const answer = await call(path, { cookie: reader.cookie });
    expect(answer.headers.get("content-type")).toContain("text/csv");
    expect((await call(path)).status).toBe(404);
  });

  it("of an example tells a guest how it came about, and nothing of links or of what members try", async () => {
    const example = await makeEnsembleRow(lab.team.id, { example: true });
    const here = { teamId: lab.team.id, ensembleId: example };
    const product = { userId: null, tokenId: null };
    const sift = { type: "sift", data: { siftId: "s", recipe: {}, kept: 1 } };
    const opened = { type: "link-opened", data: { label: "Partner lab" } };
    for (const { type, data } of [sift, opened])
      await db.insert(logbook).values({ ...here, createdAt: new Date(), ...product, type, data });
    await db
      .insert(logbook)
      .values({ ...here, createdAt: new Date(), userId: reader.id, tokenId: null, ...sift });
    const seen = await loadLogbook({ actor: { kind: "anonymous" }, ensembleId: example });
    expect(seen.rows.map(({ type, by }) => [type, by])).toEqual([["sift", "product"]]);
    expect(seen.total).toBe(1);
    const csv = await exportLogbook({ actor: { kind: "anonymous" }, ensembleId: example, filter: NO_FILTER });
    expect(csv).not.toContain("Partner lab");
  });

  it("of the whole team is for its members alone, remarks included", async () => {
    const page = await loadTeamLogbook({ actor: personOf(reader.id), teamId: lab.team.id });
    expect(page.rows.some(({ type }) => type === "edition-frozen")).toBe(true);
    expect(page.mayRemark).toBe(true);
    const path = `/teams/${lab.team.id}/logbook`;
    const written = await call(path, { cookie: reader.cookie, form: { text: "For all of us" } });
    expect(written.status).toBe(200);
    expect(await (await call(path, { cookie: reader.cookie })).text()).toContain("For all of us");
    expect((await call(path, { cookie: reader.cookie, form: { text: " " } })).status).toBe(400);
    const strange = await makeLab();
    const asked = loadTeamLogbook({ actor: personOf(strange.analyst.id), teamId: lab.team.id });
    await expect(asked).rejects.toMatchObject({ code: "not-found" });
  });
});
