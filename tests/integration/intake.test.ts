import { createHash } from "node:crypto";
import { gzipSync } from "node:zlib";
import { and, asc, eq } from "drizzle-orm";
import { beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { ensembles, frames, logbook, sources } from "~/db/schema.server";
import { readSource } from "~/services/ensembles/source-writer.server";
import { withEnv } from "../factories/environment";
import { makeMember, makeTeam, tokenOf } from "../factories/people";
import { storedRows } from "../factories/stored";
import { BUTANE, formOf, frame, makeLab, post, reference, takenIn, upload } from "../factories/upload";
import { call, ORIGIN } from "../setup/app";

let lab: Awaited<ReturnType<typeof makeLab>>;
let token: string;
beforeAll(async () => {
  lab = await makeLab();
  ({ token } = lab);
});

/** Three frames of butane; `tag` makes the bytes of every test its own. */
function butane(tag: string, comments = ["-1.5", "-1.4", "-1.3"]): string {
  return comments.map((comment, k) => frame(`${tag}_${k + 1} energy=${comment}`)).join("");
}

const fields = { level: "A method", energyUnit: "kcal/mol" };

describe("POST /ensembles", () => {
  it("answers 201 with the whole report, and the same from GET with columns", async () => {
    const response = await upload(token, [{ name: "run3.xyz", content: butane("shape") }], {
      ...fields,
      name: "Butane",
      series: "Alkanes",
    });
    expect(response.status).toBe(201);
    const body = await response.json();
    expect(response.headers.get("location")).toBe(`/api/v1/ensembles/${body.id}`);
    expect(body).toMatchObject({
      url: `${ORIGIN}/ensembles/${body.id}`,
      name: "Butane",
      series: { name: "Alkanes" },
      formula: "C4H10",
      atoms: 14,
      intake: { frames: 3, accepted: 3, held: 0, questions: [] },
      levels: [{ name: "A method", unit: "kcal/mol", count: 3, missing: 0, energyKind: "electronic" }],
    });
    const got = await (await call(`/api/v1/ensembles/${body.id}`, { token })).json();
    expect(got).toEqual(body);
    expect(got.columns).toEqual([
      {
        id: body.levels[0].id,
        name: "A method",
        kind: "energy",
        unit: "kcal/mol",
        rule: null,
        count: 3,
        missing: 0,
      },
    ]);
  });

  it("names the ensemble after its first file, and puts it into the series Unsorted", async () => {
    const taken = await takenIn(
      token,
      [{ name: "../night/run 7.xyz.gz", content: gzipSync(butane("name")) }],
      fields,
    );
    expect(taken).toMatchObject({ name: "run 7", series: { name: "Unsorted" } });
    expect(taken.files).toMatchObject([{ name: "run 7.xyz.gz", frames: 3 }]);
  });

  it("takes fields that follow the file", async () => {
    const form = new FormData();
    form.append("file", new Blob([butane("after", ["-1.5 x=3.25", "-1.4 x=3.5", "-1.3 x=3.75"])]), "a.xyz");
    for (const [name, value] of Object.entries({ ...fields, energyFrom: "key:energy" }))
      form.append(name, value);
    const response = await call("/api/v1/ensembles", { method: "POST", token, body: form });
    expect(response.status).toBe(201);
    expect((await response.json()).levels).toMatchObject([{ name: "A method", count: 3 }]);
  });

  it("numbers frames on through all files, and says which file a message is about", async () => {
    const second =
      frame("two_1 energy=-1.2") + frame("two_2 energy=-1.1", BUTANE.slice(0, 13)) + frame("two_3");
    const taken = await takenIn(
      token,
      [
        { name: "one.xyz", content: butane("files") },
        { name: "two.xyz", content: second },
      ],
      fields,
    );
    expect(taken.files.map((file) => file.frames)).toEqual([3, 3]);
    expect(taken.intake).toMatchObject({ frames: 6, accepted: 5, held: 1 });
    const held = taken.intake.messages.find((message) => message.severity === "hold");
    expect(held).toMatchObject({ file: "two.xyz", frame: 5, line: 17, code: "X12" });
    const missing = taken.intake.messages.find((message) => message.code === "E10");
    expect(missing).toMatchObject({ file: "two.xyz", frame: 6, severity: "remark" });
    expect(taken.levels).toMatchObject([{ count: 4, missing: 1 }]);
  });

  it("keeps the original bytes under their checksum, compressed files as they came", async () => {
    const packed = Buffer.concat([
      gzipSync(butane("kept")),
      gzipSync(butane("kept more")),
      Buffer.from("junk"),
    ]);
    const taken = await takenIn(token, [{ name: "k.xyz.gz", content: packed }], fields);
    expect(taken.intake.frames).toBe(6);
    expect(taken.intake.messages.map((message) => message.code)).toContain("G07");
    const sha256 = createHash("sha256").update(packed).digest();
    expect(taken.files).toMatchObject([{ sha256: sha256.toString("hex"), bytes: packed.length }]);
    const [source] = await db.select().from(sources).where(eq(sources.sha256, sha256));
    const chunks: Uint8Array[] = [];
    for await (const chunk of readSource(source?.id ?? "")) chunks.push(chunk);
    expect(Buffer.concat(chunks).equals(packed)).toBe(true);
  });

  it("takes a file that is just within the limits", async () => {
    const content = butane("limit");
    withEnv({ MAX_FILE_BYTES: content.length, MAX_FRAMES: 3, MAX_ATOMS: 14 });
    const taken = await takenIn(token, [{ name: "limit.xyz", content }], fields);
    expect(taken.intake.accepted).toBe(3);
  });

  it("takes structures without energies and without a level", async () => {
    const taken = await takenIn(token, [{ name: "plain.xyz", content: frame("") + frame("conformer 12") }]);
    expect(taken).toMatchObject({ levels: [], columns: [], intake: { accepted: 2, questions: [] } });
  });

  it("says so when a level was named and there are no energies", async () => {
    const taken = await takenIn(token, [{ name: "none.xyz", content: frame("no energy here") }], {
      level: "A",
    });
    expect(taken.levels).toEqual([]);
    expect(taken.intake.messages).toMatchObject([{ code: "E10", severity: "remark" }]);
  });

  it("makes columns of the further numbers of extended comments", async () => {
    const comment = (energy: number, dipole: number) =>
      `Properties=species:S:1:pos:R:3 energy=${energy} dipole=${dipole} name="c ${energy}"`;
    const content =
      frame(comment(-1.5, 0.25)) + frame(comment(-1.25, 0.5)) + frame("Properties=species:S:1:pos:R:3");
    const taken = await takenIn(token, [{ name: "ext.xyz", content }], {
      ...fields,
      energyFrom: "key:energy",
      energyKind: "free",
      energyTemperature: "310",
    });
    expect(taken.levels).toMatchObject([{ energyKind: "free", temperature: 310, count: 2, missing: 1 }]);
    expect(taken.columns).toMatchObject([
      { name: "A method", kind: "energy" },
      { name: "dipole", kind: "property", unit: null, count: 2, missing: 1 },
    ]);
    const [first] = await db
      .select()
      .from(frames)
      .where(and(eq(frames.ensembleId, taken.id), eq(frames.number, 1)));
    expect(first?.label).toBe("c -1.5");
  });

  it("holds what is another molecule, and takes the larger group", async () => {
    const water = ["O 0 0 0", "H 0 0.76 0.59", "H 0 -0.76 0.59"];
    const content = frame("w energy=-5", water) + butane("mixed");
    const taken = await takenIn(token, [{ name: "mixed.xyz", content }], fields);
    expect(taken).toMatchObject({ formula: "C4H10", atoms: 14, intake: { frames: 4, accepted: 3, held: 1 } });
    const refused = await post(token, `/ensembles/${taken.id}/frames/1/release`, { reason: "I want it" });
    expect(refused.status).toBe(409);
    expect((await refused.json()).detail).toContain("another molecule");
  });

  it("writes who did what into the logbook, in the same act", async () => {
    const taken = await takenIn(token, [{ name: "log.xyz", content: butane("log") }], fields);
    const rows = await db
      .select()
      .from(logbook)
      .where(eq(logbook.ensembleId, taken.id))
      .orderBy(asc(logbook.id));
    expect(rows.map((row) => row.type)).toEqual(["intake", "sift"]);
    expect(rows[0]).toMatchObject({ userId: lab.analyst.id, teamId: lab.team.id });
    expect(rows[0]?.data).toMatchObject({ frames: 3, files: [{ name: "log.xyz" }], answers: fields });
  });
});

describe("the same bytes again", () => {
  const files = [{ name: "again.xyz", content: butane("again") }];

  it("with the same answers give the same ensemble, whatever the names", async () => {
    const first = await takenIn(token, files, fields);
    const before = await storedRows();
    const again = await upload(token, [{ ...files[0]!, name: "other.xyz" }], {
      ...fields,
      name: "Other",
      series: "New",
    });
    expect(again.status).toBe(200);
    const { warnings, ...same } = await again.json();
    expect(same).toEqual(await (await call(`/api/v1/ensembles/${first.id}`, { token })).json());
    // Name and series are no answers: they stay, and that is said.
    expect(warnings.map(({ message }: { message: string }) => message)).toEqual([
      expect.stringContaining("The name was not taken up"),
      expect.stringContaining("The series was not taken up"),
    ]);
    expect(await storedRows()).toEqual(before);
  });

  it("with other answers are a conflict that says where they are, and stay so until read again", async () => {
    const files = [{ name: "b.xyz", content: butane("other answers") }];
    const first = await takenIn(token, files, fields);
    for (const other of [
      { ...fields, energyUnit: "hartree" },
      { ...fields, level: "Another" },
      { ...fields, energyFrom: "key:energy" },
    ]) {
      const refused = await upload(token, files, other);
      expect(refused.status).toBe(409);
      expect(refused.headers.get("content-type")).toContain("application/problem+json");
      expect(await refused.json()).toMatchObject({ existing: first.id, url: first.url });
    }
    const hartree = { ...fields, energyUnit: "hartree" };
    const reread = await post(token, `/ensembles/${first.id}/reread`, hartree);
    expect(reread.status).toBe(200);
    const now = await reread.json();
    expect(now).toMatchObject({ id: first.id, levels: [{ id: first.levels[0]?.id, unit: "hartree" }] });
    expect((await upload(token, files, hartree)).status).toBe(200);
    expect((await upload(token, files, fields)).status).toBe(409);
  });

  it("are another ensemble in another team, and after deletion", async () => {
    const files = [{ name: "c.xyz", content: butane("teams") }];
    const first = await takenIn(token, files, fields);
    const other = await makeLab();
    const second = await takenIn(other.token, files, fields);
    expect(second.id).not.toBe(first.id);
    await db
      .update(ensembles)
      .set({ deletedAt: new Date(), filesSha: null })
      .where(eq(ensembles.id, first.id));
    const third = await takenIn(token, files, fields);
    expect(third.id).not.toBe(first.id);
  });

  it("sent six times at the same moment make one ensemble with one answer (F05)", async () => {
    const files = [{ name: "d.xyz", content: butane("at once") }];
    const before = await storedRows();
    const responses = await Promise.all(Array.from({ length: 6 }, () => upload(token, files, fields)));
    const statuses = responses.map((response) => response.status).sort();
    expect(statuses).toEqual([200, 200, 200, 200, 200, 201]);
    const ids = new Set(
      (await Promise.all(responses.map((response) => response.json()))).map((body) => body.id),
    );
    expect(ids.size).toBe(1);
    const after = await storedRows();
    expect(after.ensembles).toBe((before.ensembles ?? 0) + 1);
    expect(after.sources).toBe((before.sources ?? 0) + 1);
    expect(after.frames).toBe((before.frames ?? 0) + 3);
    expect(after.jobs).toBe((before.jobs ?? 0) + 1);
  });

  it("sent with different answers at the same moment make one ensemble, and conflicts for the rest", async () => {
    const files = [{ name: "e.xyz", content: butane("quarrel") }];
    const responses = await Promise.all(
      ["A", "B", "C", "D"].map((level) => upload(token, files, { ...fields, level })),
    );
    expect(responses.map((response) => response.status).sort()).toEqual([201, 409, 409, 409]);
  });

  it("share their stored file with an ensemble of several", async () => {
    const one = { name: "f.xyz", content: butane("shared one") };
    const two = { name: "g.xyz", content: butane("shared two") };
    await takenIn(token, [one], fields);
    const before = await storedRows();
    await takenIn(token, [one, two], fields);
    const after = await storedRows();
    expect(after.sources).toBe((before.sources ?? 0) + 1);
  });
});

describe("GET /ensembles", () => {
  it("lists 50 a page, newest first, of one series by name or id", async () => {
    const own = await makeLab();
    const ids: string[] = [];
    for (let k = 0; k < 3; k++) {
      const series = k === 1 ? "Second" : "First";
      const file = { name: `${k}.xyz`, content: butane(`list${k}`) };
      ids.push((await takenIn(own.token, [file], { ...fields, series })).id);
    }
    const list = async (query: string) =>
      (await call(`/api/v1/ensembles${query}`, { token: own.token })).json();
    const all = await list("");
    expect(all).toMatchObject({ page: 1, pages: 1, total: 3 });
    expect(all.ensembles.map((one: { id: string }) => one.id)).toEqual([...ids].reverse());
    expect(all.ensembles[0]).toMatchObject({
      formula: "C4H10",
      intake: { frames: 3 },
      levels: [{ count: 3 }],
    });
    const second = await list("?series=Second");
    expect(second.ensembles.map((one: { id: string }) => one.id)).toEqual([ids[1]]);
    expect(await list(`?series=${second.ensembles[0].series.id}&other=1`)).toEqual(second);
    expect(await list("?series=None")).toMatchObject({ ensembles: [], total: 0 });
    expect(await list("?page=2")).toMatchObject({ ensembles: [], page: 2, pages: 1, total: 3 });
    expect((await call("/api/v1/ensembles?page=0", { token: own.token })).status).toBe(422);
  });
});

describe("a token narrowed to adding", () => {
  it("sees what it took in and nothing else, and never computes", async () => {
    const adding = await tokenOf(lab.analyst.id, lab.team.id, "add");
    const others = await takenIn(token, [{ name: "h.xyz", content: butane("of others") }], fields);
    const own = await takenIn(adding, [{ name: "i.xyz", content: butane("own") }], fields);
    expect((await call(`/api/v1/ensembles/${own.id}`, { token: adding })).status).toBe(200);
    expect((await call(`/api/v1/ensembles/${others.id}`, { token: adding })).status).toBe(404);
    const listed = await (await call("/api/v1/ensembles", { token: adding })).json();
    expect(listed.ensembles.map((one: { id: string }) => one.id)).toEqual([own.id]);
    expect((await post(adding, `/ensembles/${own.id}/sifts`, { level: null })).status).toBe(403);
    const known = await upload(adding, [{ name: "h.xyz", content: butane("of others") }], fields);
    expect(known.status).toBe(409);
    expect(await known.text()).not.toContain(others.id);
  });

  it("of somebody who became a reader takes nothing in", async () => {
    const reader = await makeMember(lab.team.id, "reader");
    const adding = await tokenOf(reader.id, lab.team.id, "add");
    expect((await upload(adding, [{ name: "j.xyz", content: butane("reader") }], fields)).status).toBe(403);
  });
});

describe("an upload from the browser", () => {
  const send = (cookie: string, content: string, more: Record<string, string> = {}) =>
    call("/files/upload", {
      method: "POST",
      cookie,
      body: formOf([{ name: "drop.xyz", content }], { team: lab.team.id, ...more }),
    });

  it("asks for unit and level, holds all frames meanwhile, and releases them with the answers", async () => {
    const response = await send(lab.analyst.cookie, butane("browser"));
    expect(response.status).toBe(201);
    const body = await response.json();
    expect(body.intake).toMatchObject({ frames: 3, accepted: 0, held: 3 });
    expect(body.intake.questions.map((one: { id: string }) => one.id)).toEqual(["energy-unit", "level"]);
    const unit = body.intake.questions[0];
    expect(unit.options.find((one: { id: string }) => one.id === "kcal/mol").spreadKcal).toBeCloseTo(0.2, 10);
    expect((await post(token, `/ensembles/${body.id}/sifts`, { level: null })).status).toBe(409);

    const halfway = await post(token, `/ensembles/${body.id}/answers`, {
      answers: [{ id: "energy-unit", option: "kcal/mol" }],
    });
    expect((await halfway.json()).intake).toMatchObject({ accepted: 0, questions: [{ id: "level" }] });
    const done = await post(token, `/ensembles/${body.id}/answers`, {
      answers: [{ id: "level", option: "My level" }],
    });
    expect((await done.json()).intake).toMatchObject({ accepted: 3, held: 0, questions: [] });
    const got = await (await call(`/api/v1/ensembles/${body.id}`, { token })).json();
    expect(got.levels).toMatchObject([{ name: "My level", unit: "kcal/mol", count: 3 }]);
  });

  it("of files that are here already leads to them", async () => {
    const first = await takenIn(token, [{ name: "k.xyz", content: butane("already") }], fields);
    const again = await send(lab.analyst.cookie, butane("already"));
    expect(again.status).toBe(200);
    expect((await again.json()).id).toBe(first.id);
  });

  it("goes into no team but one's own, and not for readers", async () => {
    const reader = await makeMember(lab.team.id, "reader");
    expect((await send(reader.cookie, butane("reader"))).status).toBe(403);
    const other = await makeTeam();
    expect((await send(lab.analyst.cookie, butane("foreign"), {})).status).toBe(201);
    const outsider = await makeMember(other.id, "owner");
    const before = await storedRows();
    expect((await send(outsider.cookie, butane("outsider"))).status).toBe(404);
    const anonymous = formOf([{ name: "a.xyz", content: butane("anonymous") }], { team: lab.team.id });
    const refused = await call("/files/upload", { method: "POST", body: anonymous });
    expect(refused.status).toBe(404);
    expect(await storedRows()).toEqual(before);
  });
});

describe("questions", () => {
  const two = (tag: string) =>
    [1, 2, 3].map((k) => frame(`${tag}_${k} E_one= ${-k}.5 E_two= ${-2 * k}.25 kcal/mol`)).join("");

  it("about several numbers hold the frames until they are answered, in order, by one call", async () => {
    const taken = await takenIn(token, [{ name: "two.xyz", content: two("q") }], { level: "M" });
    expect(taken.intake).toMatchObject({ accepted: 0, held: 3 });
    expect(taken.intake.questions).toMatchObject([{ id: "energy-from", code: "energy-from" }]);
    const options = taken.intake.questions[0]?.options ?? [];
    expect(options.map((option) => option.id)).toEqual(
      expect.arrayContaining(["key:E_one", "key:E_two", "none"]),
    );
    expect(options.find((option) => option.id === "key:E_one")?.values).toEqual(["-1.5", "-2.5", "-3.5"]);
    expect(taken.levels).toEqual([]);

    const wrong = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "energy-from", option: "key:E_three" }],
    });
    expect(wrong.status).toBe(422);
    // E_one has no unit beside it: that question follows, and the same call may answer it.
    const done = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [
        { id: "energy-unit", option: "kJ/mol" },
        { id: "energy-from", option: "key:E_one" },
      ],
    });
    expect(done.status).toBe(200);
    expect((await done.json()).intake).toMatchObject({ accepted: 3, held: 0, questions: [] });
    const got = await (await call(`/api/v1/ensembles/${taken.id}`, { token })).json();
    expect(got.levels).toMatchObject([{ name: "M", unit: "kJ/mol", count: 3 }]);

    const again = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "energy-from", option: "key:E_one" }],
    });
    expect(again.status).toBe(200);
    const other = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "energy-from", option: "key:E_two" }],
    });
    expect(other.status).toBe(409);
    const unknown = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "colour", option: "x" }],
    });
    expect(unknown.status).toBe(422);
  });

  it("are not asked where the request says which number, by key or by place", async () => {
    const byKey = await takenIn(token, [{ name: "k.xyz", content: two("key") }], {
      level: "M",
      energyFrom: "key:E_two",
    });
    expect(byKey.levels).toMatchObject([{ unit: "kcal/mol", count: 3 }]);
    // Every number counts: "q_1" is a word, so -k.5 is the first.
    const byPlace = await takenIn(token, [{ name: "p.xyz", content: two("place") }], {
      ...fields,
      energyFrom: "number:1",
    });
    expect(byPlace.levels).toMatchObject([{ unit: "kcal/mol", count: 3 }]);
  });

  it("can be answered with none, and the structures stand without energies", async () => {
    const taken = await takenIn(token, [{ name: "n.xyz", content: two("none") }], { level: "M" });
    const done = await post(token, `/ensembles/${taken.id}/answers`, {
      answers: [{ id: "energy-from", option: "none" }],
    });
    expect((await done.json()).intake).toMatchObject({ accepted: 3, questions: [] });
    expect((await (await call(`/api/v1/ensembles/${taken.id}`, { token })).json()).levels).toEqual([]);
  });
});

describe("a person's decision on a frame", () => {
  it("holds, releases, and stands in the logbook; the checksum of the accepted frames comes back", async () => {
    const taken = await takenIn(token, [{ name: "l.xyz", content: butane("decide") }], fields);
    const sha = async () =>
      (await db.select({ sha: ensembles.acceptedSha }).from(ensembles).where(eq(ensembles.id, taken.id)))[0]
        ?.sha;
    const before = await sha();
    const held = await post(token, `/ensembles/${taken.id}/frames/2/hold`, { reason: "not converged" });
    expect(held.status).toBe(200);
    expect(await held.json()).toMatchObject({ frame: 2, state: "held", intake: { accepted: 2, held: 1 } });
    expect((await sha())?.equals(before ?? Buffer.alloc(0))).toBe(false);
    const twice = await post(token, `/ensembles/${taken.id}/frames/2/hold`, { reason: "not converged" });
    expect([twice.status, (await twice.json()).state]).toEqual([200, "held"]);
    expect((await post(token, `/ensembles/${taken.id}/frames/2/hold`, { reason: "again" })).status).toBe(409);
    const released = await post(token, `/ensembles/${taken.id}/frames/2/release`, { reason: "it is" });
    expect(await released.json()).toMatchObject({ frame: 2, intake: { accepted: 3, held: 0 } });
    expect((await sha())?.equals(before ?? Buffer.alloc(0))).toBe(true);
    const repeated = await post(token, `/ensembles/${taken.id}/frames/2/release`, { reason: "it is" });
    expect([repeated.status, (await repeated.json()).state]).toEqual([200, "accepted"]);
    expect((await post(token, `/ensembles/${taken.id}/frames/2/release`, { reason: "x" })).status).toBe(409);
    expect((await post(token, `/ensembles/${taken.id}/frames/1/release`, { reason: "it is" })).status).toBe(
      409,
    );
    const types = await db
      .select({ type: logbook.type })
      .from(logbook)
      .where(eq(logbook.ensembleId, taken.id));
    const decided = types.map((row) => row.type).filter((type) => type === "hold" || type === "release");
    expect(decided).toEqual(["hold", "release"]);
  });

  it("needs a reason and a frame that is there", async () => {
    const taken = await takenIn(token, [{ name: "m.xyz", content: butane("reason") }], fields);
    const at = (frame: string) => `/ensembles/${taken.id}/frames/${frame}/hold`;
    expect((await post(token, at("1"), {})).status).toBe(422);
    expect((await post(token, at("1"), { reason: "  " })).status).toBe(422);
    expect((await post(token, at("1"), { reason: "x", state: "accepted" })).status).toBe(422);
    for (const frame of ["4", "0", "1.0", "-1", "one"]) {
      expect((await post(token, at(frame), { reason: "x" })).status).toBe(404);
    }
  });

  it("outlives reading the files again", async () => {
    const taken = await takenIn(token, [{ name: "o.xyz", content: butane("outlives") }], fields);
    await post(token, `/ensembles/${taken.id}/frames/3/hold`, { reason: "doubtful" });
    const again = await post(token, `/ensembles/${taken.id}/reread`, { ...fields, energyUnit: "kJ/mol" });
    expect((await again.json()).intake).toMatchObject({ accepted: 2, held: 1 });
    const rows = await db
      .select()
      .from(frames)
      .where(and(eq(frames.ensembleId, taken.id), eq(frames.number, 3)));
    expect(rows).toMatchObject([{ state: "held", holdReason: "by-hand", note: "doubtful" }]);
  });

  it("never brings another species or a broken frame back", async () => {
    const broken = frame("broken energy=-1.1", [...BUTANE.slice(0, 13), "H 2.07 1,5 0.1"]);
    const taken = await takenIn(token, [{ name: "p.xyz", content: butane("species") + broken }], fields);
    expect(taken.intake).toMatchObject({ accepted: 3, held: 1 });
    const refused = await post(token, `/ensembles/${taken.id}/frames/4/release`, { reason: "please" });
    expect(refused.status).toBe(409);
    const types = await db
      .select({ type: logbook.type })
      .from(logbook)
      .where(eq(logbook.ensembleId, taken.id));
    expect(types.map((row) => row.type)).toContain("release-refused");
  });
});

it("gives coordinates back bit for bit, in the order asked (F13)", async () => {
  const taken = await takenIn(
    token,
    [{ name: "q.xyz", content: reference("ensembles/difluoroethane.xyz") }],
    fields,
  );
  const answer = await call(`/files/ensembles/${taken.id}/coordinates?frames=200,1-2`, {
    cookie: lab.analyst.cookie,
  });
  expect(answer.status).toBe(200);
  const doubles = new Float64Array(await answer.arrayBuffer());
  expect(doubles.length).toBe(3 * 8 * 3);
  const lines = reference("ensembles/difluoroethane.xyz").toString().split("\n");
  const numbers = (frameNumber: number) =>
    lines
      .slice((frameNumber - 1) * 10 + 2, frameNumber * 10)
      .flatMap((line) => line.trim().split(/\s+/).slice(1, 4).map(Number));
  expect([...doubles]).toEqual([...numbers(200), ...numbers(1), ...numbers(2)]);
  for (const bad of ["", "0", "1,", "201", "a", "5-3"]) {
    const refused = await call(`/files/ensembles/${taken.id}/coordinates?frames=${bad}`, {
      cookie: lab.analyst.cookie,
    });
    expect(refused.status, bad).toBe(422);
  }
});
