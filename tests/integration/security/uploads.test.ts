import { gzipSync } from "node:zlib";
import { afterAll, beforeAll, beforeEach, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { throttles } from "~/db/schema.server";
import { openApiDocument } from "~/services/openapi.server";
import { withEnv } from "../../factories/environment";
import { type FilledTeam, fillTeam, threeFrames } from "../../factories/filled-team";
import { storedRows } from "../../factories/stored";
import { BUTANE, formOf, frame, makeLab, type Sent, sifted, upload, withJobs } from "../../factories/upload";
import { zipOf } from "../../factories/zip";
import { call } from "../../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let own: FilledTeam;
let lab: Awaited<ReturnType<typeof makeLab>>;
const fields = { level: "A", energyUnit: "kcal/mol" };

beforeAll(async () => {
  runner = await withJobs();
  own = await fillTeam();
}, 120_000);
afterAll(() => runner.stop());
beforeEach(async () => {
  lab = await makeLab();
  await db.delete(throttles);
});

const send = async (files: Sent[], more: Record<string, string> = {}) => {
  const answer = await upload(lab.token, files, { ...fields, ...more });
  return { status: answer.status, text: await answer.text() };
};
const one = (content: string | Uint8Array, name = "run.xyz") => send([{ name, content }]);

describe("limits, at the limit and one beyond (security E01)", () => {
  const good = frame("energy=-1.5") + frame("energy=-1.25");

  it("of bytes of a file", async () => {
    withEnv({ MAX_FILE_BYTES: good.length });
    expect((await one(good)).status).toBe(201);
    expect((await one(`${good}\n`)).status).toBe(413);
  });

  it("of bytes that a packed file unpacks to", async () => {
    withEnv({ MAX_FILE_BYTES: good.length });
    expect((await one(gzipSync(good), "run.xyz.gz")).status).toBe(201);
    expect((await one(gzipSync(`${good}\n`), "run.xyz.gz")).status).toBe(413);
  });

  it("of frames", async () => {
    withEnv({ MAX_FRAMES: 2 });
    expect((await one(good)).status).toBe(201);
    expect((await one(good + frame("energy=-1.1"))).status).toBe(422);
  });

  it("of atoms", async () => {
    withEnv({ MAX_ATOMS: BUTANE.length });
    expect((await one(good)).status).toBe(201);
    withEnv({ MAX_ATOMS: BUTANE.length - 1 });
    expect((await one(frame("energy=-2"))).status).toBe(422);
  });

  it("of columns out of comments: the rest is named in one remark", async () => {
    const pairs = (n: number) => Array.from({ length: n }, (_, k) => `k${k}=${k}.5`).join(" ");
    withEnv({ MAX_COLUMNS: 3 });
    const at = await one(frame(`energy=-1.5 ${pairs(2)}`));
    const beyond = await one(frame(`energy=-1.6 ${pairs(6)}`));
    expect([at.status, beyond.status]).toEqual([201, 201]);
    const columns = (text: string) => (JSON.parse(text) as { columns: unknown[] }).columns.length;
    expect(columns(at.text)).toBeLessThanOrEqual(3);
    expect(columns(beyond.text)).toBeLessThanOrEqual(4);
  });

  it("of the bytes of a line", async () => {
    const comment = (bytes: number) => `energy=-1.5 ${"x".repeat(bytes - 12)}`;
    expect((await one(frame(comment(2 ** 20)))).status).toBe(201);
    expect((await one(frame(comment(2 ** 20 + 1)))).status).toBe(422);
  });

  it("of files in an archive", async () => {
    const entries = [{ name: "a.xyz", content: good }];
    // The list of an archive says how many it holds; a lie about it is damage, and beyond the limit is not looked at.
    expect((await one(zipOf(entries), "a.zip")).status).toBe(201);
    const beyond = await one(zipOf(entries, { count: 10_001 }), "b.zip");
    expect(beyond.status).toBe(422);
    expect(beyond.text).toContain("10,000 files");
  });

  it("of files in a form", async () => {
    const files = (n: number) =>
      Array.from({ length: n }, (_, k) => ({ name: `${k}.xyz`, content: frame(`energy=-${k}`) }));
    expect((await send(files(200))).status).toBe(201);
    expect((await send(files(201))).status).toBe(400);
  }, 60_000);

  it("of a team's bytes", async () => {
    withEnv({ TEAM_QUOTA_BYTES: good.length });
    expect((await one(good)).status).toBe(201);
    expect((await one(frame("energy=-9"))).status).toBe(413);
  });

  it("of uploads a minute", async () => {
    withEnv({ API_UPLOADS_PER_MINUTE: 2 });
    const statuses = [await one(good), await one(good), await one(good)].map(({ status }) => status);
    expect(statuses).toEqual([201, 200, 429]);
  });
});

describe("archives made to harm (security E02)", () => {
  it("stop at the limit of unpacked bytes, and nothing of them stays", async () => {
    withEnv({ MAX_FILE_BYTES: 2 ** 20 });
    const before = await storedRows();
    const bomb = gzipSync(Buffer.alloc(100e6, "900\n"));
    expect(bomb.length).toBeLessThan(200_000);
    const told = await one(bomb, "bomb.xyz.gz");
    expect(told.status).toBe(413);
    expect(told.text).toMatch(/1\.0.MB/);
    const entries = Array.from({ length: 9_000 }, (_, k) => ({
      name: `${k}.xyz`,
      content: "900\n".repeat(50),
    }));
    expect((await one(zipOf(entries), "many.zip")).status).toBe(413);
    expect((await one(gzipSync(gzipSync("x")), "nested.xyz.gz")).status).toBe(422);
    expect((await one(zipOf([]), "empty.zip")).status).toBe(422);
    expect(await storedRows()).toEqual(before);
  });

  it("with 100,000 entries are refused by their list alone", async () => {
    const told = await one(zipOf([{ name: "a.xyz", content: "x" }], { count: 100_000 }), "list.zip");
    expect(told.status).toBe(422);
    expect(told.text).toContain("more than 65,000");
  });
});

describe("names of files (security E04)", () => {
  const NAMES: [string, RegExp][] = [
    ["../../../etc/passwd", /^attachment; filename="passwd"/],
    ["..\\..\\win.ini.xyz", /^attachment; filename="win\.ini\.xyz"/],
    ["CON.xyz", /^attachment; filename="_CON\.xyz"/],
    ["n".repeat(300), /^attachment; filename="n{1,120}/],
    // Signs that turn the order of others around are written out at intake.
    ["\u202egnp.xyz", /^attachment; filename="u202egnp\.xyz"/],
    ["Molekül 分子.xyz", /^attachment; filename="Molek_l __\.xyz"; filename\*=UTF-8''Molek%C3%BCl/],
    ['"><img src=x onerror=alert(1)>.xyz', /^attachment; filename="[^"<>]*"/],
  ];

  it.each(NAMES)(
    "%j is a text, an internal id on our side, and a safe name on the way out (security E05)",
    async (name, header) => {
      const answer = await upload(lab.token, [{ name, content: threeFrames(name.slice(0, 3)) }], fields);
      const { id } = await answer.json();
      expect(answer.status).toBe(201);
      const source = await call(`/files/ensembles/${id}/sources/0`, { cookie: lab.analyst.cookie });
      expect(source.headers.get("content-disposition")).toMatch(header);
      expect(source.headers.get("content-disposition")).toMatch(/^[\x20-\x7e]+$/);
      expect(source.headers.get("content-type")).toBe("application/octet-stream");
      expect(source.headers.get("x-content-type-options")).toBe("nosniff");
      await source.arrayBuffer();
      const page = await (await call(`/ensembles/${id}/intake`, { cookie: lab.analyst.cookie })).text();
      expect(page).not.toContain("<img src=x");
    },
  );
});

describe("fields that nobody asked for (C04)", () => {
  const document = JSON.parse(JSON.stringify(openApiDocument()));
  const bodies = Object.entries<Record<string, { requestBody?: { content: Record<string, unknown> } }>>(
    document.paths,
  ).flatMap(([path, operations]) =>
    Object.entries(operations).flatMap(([method, { requestBody }]) =>
      Object.keys(requestBody?.content ?? {}).map((type) => [method.toUpperCase(), path, type] as const),
    ),
  );
  const EXTRA = [
    "role",
    "teamId",
    "owner",
    "createdBy",
    "opened",
    "example",
    "id",
    "__proto__",
    "constructor",
  ];

  it("has every body of the API to look at", () => {
    expect(bodies.length).toBeGreaterThanOrEqual(7);
  });

  it.each(bodies)("%s %s as %s are refused by name", async (method, path, type) => {
    const address = `/api/v1${path.replace("{id}", own.ids.ensemble).replace("{frame}", "1")}`;
    for (const name of EXTRA) {
      const files = [{ name: "a.xyz", content: frame("energy=-3") }];
      const text = `{"${name}":"owner"}`;
      const form = type.startsWith("multipart/") && path !== "/ensembles/{id}/reread";
      const body = form ? formOf(files, { [name]: "owner" }) : text;
      const headers = new Headers(form ? {} : { "content-type": "application/json" });
      const answer = await call(address, { method, token: own.tokens.full, body, headers });
      const problem = await answer.json();
      expect(answer.status, name).toBe(422);
      // An own key of that name in a JSON text is no field of ours either, but no reader calls it by name.
      if (!name.startsWith("__")) expect(JSON.stringify(problem), name).toContain(name);
    }
  });

  it("in forms of pages set nothing: role, flags and counters stay as they are", async () => {
    const { cookie } = own.people.reader;
    const slipped = { role: "owner", demo: "1", teamId: own.ids.team, id: own.people.owner.id };
    const named = await call("/account", { form: { intent: "name", name: "A person", ...slipped }, cookie });
    expect(named.status).toBe(200);
    const settings = await call(`/teams/${own.ids.team}/people`, {
      form: { intent: "settings", name: "Mine", linkDays: "400", ...slipped },
      cookie,
    });
    expect([400, 403]).toContain(settings.status);
    const people = await call(`/teams/${own.ids.team}/people`, {
      form: { intent: "invite", email: "x@lab.example", role: "owner" },
      cookie,
    });
    expect(people.status).toBe(403);
  });
});

describe("labels and columns called like what objects have by themselves (security E07)", () => {
  it("are labels and columns, from the file to the export", async () => {
    const names = ["__proto__", "constructor", "toString"];
    const shapes = names.map((name, k) => {
      const atoms = BUTANE.map((line, at) => (at === 3 ? `C 1.9480 0.1280 0.0${k * 3}00` : line));
      return frame(`name=${name} energy=-1.${k + 1} __proto__=${k}.5 constructor=${k}.25`, atoms);
    });
    const answer = await upload(lab.token, [{ name: "names.xyz", content: shapes.join("") }], {
      ...fields,
      energyFrom: "key:energy",
    });
    const { id } = await answer.json();
    expect(answer.status).toBe(201);
    const table = `label,hasOwnProperty [D],valueOf\n${names.map((name, k) => `${name},${k}.5,${k}`).join("\n")}\n`;
    const added = await call(`/api/v1/ensembles/${id}/columns`, {
      ...{ method: "POST", token: lab.token, body: formOf([{ name: "t.csv", content: table }]) },
    });
    const columns = await added.json();
    expect(added.status, JSON.stringify(columns)).toBe(201);
    expect(columns.columns).toMatchObject([
      { name: "hasOwnProperty", count: 3, missing: 0 },
      { name: "valueOf", count: 3, missing: 0 },
    ]);
    const sift = await sifted(lab.token, id, { level: "A", rmsdTolerance: 0.0001 });
    const csv = await (await call(`/api/v1/sifts/${sift.id}/export.csv`, { token: lab.token })).text();
    for (const name of [...names, "hasOwnProperty [D]"]) expect(csv).toContain(name);
    expect({}.constructor).toBe(Object);
  });
});
