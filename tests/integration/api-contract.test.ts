import { eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { members } from "~/db/schema.server";
import { problemSchema, siftSchema } from "~/lib/api/schemas";
import { openApiDocument } from "~/services/openapi.server";
import { join, makeMember, makeTeam, tokenOf } from "../factories/people";
import { formOf, frame, makeLab, sifted, takenIn, upload, withJobs } from "../factories/upload";
import { call, routeRows } from "../setup/app";
import { openApiObject, operationsOf, readerOf } from "../setup/openapi-rules";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let ids: { ensemble: string; sift: string };
const tokens: Record<string, string> = {};

const content = frame("energy=-1.5") + frame("energy=-1.25");
const fields = { level: "A", energyUnit: "kcal/mol" };

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab();
  const taken = await takenIn(lab.token, [{ name: "a.xyz", content }], fields);
  const sift = await sifted(lab.token, taken.id, { level: "A" });
  ids = { ensemble: taken.id, sift: sift.id };
  const owner = await makeMember(lab.team.id, "owner");
  const reader = await makeMember(lab.team.id, "reader");
  const other = await makeTeam();
  const stranger = await makeMember(other.id, "owner");
  await join(other.id, lab.analyst.id, "owner");
  tokens.owner = await tokenOf(owner.id, lab.team.id);
  tokens.analyst = lab.token;
  tokens.reader = await tokenOf(reader.id, lab.team.id);
  tokens["read token"] = await tokenOf(lab.analyst.id, lab.team.id, "read");
  tokens["add token"] = await tokenOf(lab.analyst.id, lab.team.id, "add");
  tokens.stranger = await tokenOf(stranger.id, other.id);
  tokens["same person, other team"] = await tokenOf(lab.analyst.id, other.id);
});
afterAll(() => runner.stop());

interface ApiCall {
  method: "GET" | "POST" | "DELETE";
  path: string;
  /** What an analyst's call with nothing in its body answers: access is through, the body is not right. */
  empty: number;
  verb: "read" | "take-in" | "compute";
}

/** Every call on an object, but for openapi.json. */
const CALLS: ApiCall[] = [
  { method: "GET", path: "/ensembles/:id", empty: 200, verb: "read" },
  { method: "POST", path: "/ensembles/:id/answers", empty: 415, verb: "take-in" },
  { method: "POST", path: "/ensembles/:id/reread", empty: 415, verb: "take-in" },
  { method: "POST", path: "/ensembles/:id/frames/1/release", empty: 415, verb: "compute" },
  { method: "POST", path: "/ensembles/:id/frames/1/hold", empty: 415, verb: "compute" },
  { method: "POST", path: "/ensembles/:id/sifts", empty: 415, verb: "compute" },
  { method: "GET", path: "/sifts/:id", empty: 200, verb: "read" },
  { method: "DELETE", path: "/sifts/:id", empty: 202, verb: "compute" },
  { method: "GET", path: "/sifts/:id/populations", empty: 200, verb: "read" },
  { method: "GET", path: "/sifts/:id/averages.csv", empty: 200, verb: "read" },
  { method: "GET", path: "/sifts/:id/export.xyz", empty: 200, verb: "read" },
  { method: "GET", path: "/sifts/:id/export.csv", empty: 200, verb: "read" },
  { method: "GET", path: "/sifts/:id/export.json", empty: 200, verb: "read" },
];

const on = (path: string, id?: string) =>
  `/api/v1${path.replace(":id", id ?? (path.startsWith("/sifts") ? ids.sift : ids.ensemble))}`;

const statusOf = async (method: string, path: string, token: string | undefined) =>
  (await call(path, { method, token })).status;

describe.each(CALLS)("$method $path", ({ method, path, empty, verb }) => {
  const expected: Record<string, number> = {
    owner: empty,
    analyst: empty,
    reader: verb === "read" ? empty : 403,
    "read token": verb === "read" ? empty : 403,
    "add token": 404,
    stranger: 404,
    "same person, other team": 404,
  };

  it("answers each caller as its role says, before it looks at the body", async () => {
    const found: Record<string, number> = {};
    for (const who of Object.keys(expected)) found[who] = await statusOf(method, on(path), tokens[who]);
    expect(found).toEqual(expected);
  });

  it("needs a token, and tells nothing without one", async () => {
    for (const token of [undefined, "lowl_wrong", `lowl_${"x".repeat(43)}`]) {
      const response = await call(on(path), { method, token: token ?? "" });
      expect(response.status).toBe(401);
      expect(response.headers.get("www-authenticate")).toContain("Bearer");
      expect(problemSchema.parse(await response.json()).status).toBe(401);
    }
    // A signed-in browser is no token.
    const response = await call(on(path), { method, cookie: lab.analyst.cookie });
    expect(response.status).toBe(401);
  });

  it("does not know what is not there, nor ids of another form", async () => {
    for (const id of ["a".repeat(16), "A".repeat(16), "1", "a%20b", "null", `${"a".repeat(16)}a`]) {
      expect(await statusOf(method, on(path, id), tokens.owner), id).toBe(404);
    }
  });

  it("refuses other methods with what is allowed", async () => {
    for (const other of ["PUT", "PATCH", "GET", "POST", "DELETE"]) {
      const same = CALLS.some((one) => one.path === path && one.method === other);
      if (same) continue;
      const response = await call(on(path), { method: other, token: tokens.owner });
      expect(response.status, other).toBe(405);
      expect(response.headers.get("allow")).toContain(method);
      expect(response.headers.get("content-type")).toContain("application/problem+json");
    }
  });
});

describe("the team's own calls", () => {
  it("let readers list and not take in, and adding tokens take in", async () => {
    const statuses: Record<string, [number, number]> = {};
    for (const who of Object.keys(tokens)) {
      const token = tokens[who] ?? "";
      statuses[who] = [
        await statusOf("GET", "/api/v1/ensembles", token),
        // An empty body of no type: whoever may take in hears of the type, the others do not get so far.
        await statusOf("POST", "/api/v1/ensembles", token),
      ];
    }
    expect(statuses).toEqual({
      owner: [200, 415],
      analyst: [200, 415],
      reader: [200, 403],
      "read token": [200, 403],
      "add token": [200, 415],
      stranger: [200, 415],
      "same person, other team": [200, 415],
    });
    const foreign = await (await call("/api/v1/ensembles", { token: tokens.stranger })).json();
    expect(foreign.total).toBe(0);
  });

  it("count a changed role from the next call on", async () => {
    const person = await makeMember(lab.team.id, "analyst");
    const token = await tokenOf(person.id, lab.team.id);
    expect((await upload(token, [{ name: "r.xyz", content: frame("energy=1.5") }])).status).toBe(422);
    await db.update(members).set({ role: "reader" }).where(eq(members.userId, person.id));
    expect((await upload(token, [{ name: "r.xyz", content: frame("energy=1.5") }])).status).toBe(403);
    await db.delete(members).where(eq(members.userId, person.id));
    expect((await upload(token, [{ name: "r.xyz", content: frame("energy=1.5") }])).status).toBe(401);
  });
});

describe("bodies", () => {
  const send = (body: string, type = "application/json") =>
    call(on("/ensembles/:id/sifts"), {
      method: "POST",
      token: tokens.analyst,
      body,
      headers: { "content-type": type },
    });

  it("of another type are 415, broken ones 400, wrong ones 422, unknown fields too (C04)", async () => {
    expect((await send('{"level":"A"}', "text/plain")).status).toBe(415);
    expect((await send('{"level":"A"}', "application/jsonp")).status).toBe(415);
    const packed = await call(on("/ensembles/:id/sifts"), {
      method: "POST",
      token: tokens.analyst,
      body: "{}",
      headers: { "content-type": "application/json", "content-encoding": "gzip" },
    });
    expect([packed.status, (await packed.json()).title]).toEqual([415, "Packed bodies are not read"]);
    expect((await send('{"level":')).status).toBe(400);
    expect((await send("")).status).toBe(400);
    for (const wrong of ["null", "[]", "3", '"A"', '{"level":"A","teamId":"x"}']) {
      expect((await send(wrong)).status, wrong).toBe(422);
    }
    expect((await send('{"level":"A"}', "application/json; charset=utf-8")).status).toBe(202);
    // Names that objects have by themselves are names like any other.
    expect((await send('{"level":"__proto__"}')).status).toBe(422);
    expect((await send('{"level":"constructor"}')).status).toBe(422);
  });
});

describe("GET /openapi.json", () => {
  it("needs no token and names every call of the table of routes", async () => {
    const response = await call("/api/v1/openapi.json", {});
    expect(response.status).toBe(200);
    const document = await response.json();
    expect(document.openapi).toBe("3.1.0");
    const named = Object.keys(document.paths);
    const routes = routeRows()
      .filter((row) => row.parentId === "routes/api/layout" && row.path !== "*")
      .map((row) => `/${(row.path ?? "").replace(/:(\w+)/g, "{$1}")}`);
    expect(named.sort()).toEqual(routes.sort());
  });

  it("gives every call a name of its own, and every word of an address a parameter", () => {
    const document = JSON.parse(JSON.stringify(openApiDocument()));
    const names: string[] = [];
    type Operation = { operationId: string; parameters?: { in: string; name: string; required: boolean }[] };
    for (const [path, operations] of Object.entries<Record<string, Operation>>(document.paths)) {
      const words = [...path.matchAll(/\{(\w+)\}/g)].map(([, word]) => word);
      for (const [method, { operationId, parameters = [] }] of Object.entries(operations)) {
        names.push(operationId);
        const inPath = parameters.filter((one) => one.in === "path");
        expect(inPath.map(({ name }) => name).sort(), `${method} ${path}`).toEqual(words.sort());
        expect(inPath.every(({ required }) => required)).toBe(true);
      }
    }
    expect(new Set(names).size).toBe(names.length);
  });

  it("names the refusals of every call, and those of bodies where there is one", async () => {
    const document = JSON.parse(JSON.stringify(openApiDocument()));
    for (const [path, operations] of Object.entries<
      Record<string, { responses: object; requestBody?: object }>
    >(document.paths)) {
      for (const [method, { responses, requestBody }] of Object.entries(operations)) {
        const common = path === "/openapi.json" ? ["429"] : ["401", "403", "404", "405", "422", "429"];
        const ofBody = requestBody === undefined ? [] : ["400", "408", "413", "415"];
        expect(Object.keys(responses), `${method} ${path}`).toEqual(
          expect.arrayContaining([...common, ...ofBody]),
        );
      }
    }
    expect(document.paths["/openapi.json"].get.security).toEqual([]);
  });

  it("describes what is sent: references resolve, and an answer has the members that it names", async () => {
    const text = JSON.stringify(openApiDocument());
    const document = JSON.parse(text);
    for (const [, name] of text.matchAll(/"#\/components\/schemas\/(\w+)"/g)) {
      expect(document.components.schemas).toHaveProperty(name ?? "");
    }
    expect(text).not.toMatch(/"nullable":(true|false)/);
    const sift = await (await call(on("/sifts/:id"), { token: tokens.analyst })).json();
    expect(siftSchema.strict().parse(sift)).toEqual(sift);
    const required = document.components.schemas.Sift.required;
    expect(Object.keys(sift)).toEqual(expect.arrayContaining(required));
  });
});

describe("answers of real calls", () => {
  const document = openApiObject.parse(JSON.parse(JSON.stringify(openApiDocument())));
  const operations = operationsOf(document);
  const met = new Set<string>();

  /** Makes a call and holds its answer to what the document says of that status. */
  const ask = async (method: string, template: string, path: string, init: object = {}) => {
    const response = await call(`/api/v1${path}`, { method, token: tokens.analyst, ...init });
    const found = operations.find((one) => one.method === method && one.path === template);
    const where = `${method} ${template} ${response.status}`;
    const described = found?.operation.responses[String(response.status)];
    if (!found || !described || !("description" in described) || !("content" in described)) {
      throw new Error(`${where} is not described: ${await response.text()}`);
    }
    const type = response.headers.get("content-type")?.split(";", 1)[0] ?? "";
    expect(Object.keys(described.content ?? {}), where).toEqual([type]);
    const text = await response.text();
    const body = type.endsWith("json") ? JSON.parse(text) : text;
    const read = readerOf(document, described.content?.[type]?.schema).safeParse(body);
    expect(read.error?.issues ?? [], where).toEqual([]);
    for (const name of Object.keys(described.headers ?? {}))
      expect(response.headers.has(name), where).toBe(true);
    met.add(`${found.operation.operationId} ${response.status}`);
    return body;
  };
  const send = (template: string, path: string, body: object) =>
    ask("POST", template, path, {
      body: JSON.stringify(body),
      headers: { "content-type": "application/json" },
    });
  const sendFiles = (template: string, path: string, name: string, text: string, words = {}) =>
    ask("POST", template, path, { body: formOf([{ name, content: text }], words) });

  it("of taking in, asking and deciding fit their schemas", async () => {
    const files = frame("energy=1.5 shape=1") + frame("energy=2.25 shape=2");
    const { id } = await sendFiles("/ensembles", "/ensembles", "s.xyz", files, fields);
    await sendFiles("/ensembles", "/ensembles", "s.xyz", files, fields);
    await sendFiles("/ensembles", "/ensembles", "s.xyz", files, { ...fields, energyUnit: "kJ/mol" });
    await sendFiles("/ensembles", "/ensembles", "empty.xyz", "", fields);
    await ask("GET", "/ensembles", "/ensembles");
    await ask("GET", "/ensembles/{id}", `/ensembles/${id}`);
    const more = [`/ensembles/${id}/files`, "t.xyz", frame("energy=3 shape=3")] as const;
    await sendFiles("/ensembles/{id}/files", ...more);
    await sendFiles("/ensembles/{id}/files", ...more);
    await send("/ensembles/{id}/frames/{frame}/hold", `/ensembles/${id}/frames/3/hold`, { reason: "to see" });
    await send("/ensembles/{id}/frames/{frame}/release", `/ensembles/${id}/frames/3/release`, {
      reason: "seen",
    });
    await send("/ensembles/{id}/frames/{frame}/release", `/ensembles/${id}/frames/3/release`, {
      reason: "again",
    });
    await send("/ensembles/{id}/reread", `/ensembles/${id}/reread`, { ...fields, energyUnit: "kJ/mol" });

    const open = frame("1.5 7.5") + frame("2.5 8.25");
    const asked = await sendFiles("/ensembles", "/ensembles", "o.xyz", open, fields);
    const [question] = asked.intake.questions;
    const answers = [{ id: question.id, option: question.options[0].id }];
    await send("/ensembles/{id}/answers", `/ensembles/${asked.id}/answers`, { answers });
    await send("/ensembles/{id}/answers", `/ensembles/${asked.id}/answers`, { answers: [] });
    await ask("GET", "/ensembles/{id}", `/ensembles/${"a".repeat(16)}`);
    await ask("GET", "/ensembles/{id}", `/ensembles/${id}`, { token: "lowl_wrong" });
    await ask("POST", "/ensembles", "/ensembles", { token: tokens.reader });
    await ask("POST", "/ensembles", "/ensembles", { body: "x", headers: { "content-type": "text/plain" } });
  });

  it("of computing and handing out fit their schemas", async () => {
    const on = { ensemble: `/ensembles/${ids.ensemble}`, sift: `/sifts/${ids.sift}` };
    const table = "frame,B [kcal/mol],dipole [D]\n1,0.0,2.5\n2,0.75,\n";
    const columns = ["/ensembles/{id}/columns", `${on.ensemble}/columns`, "b.csv", table] as const;
    await sendFiles(...columns, { preview: "true" });
    await sendFiles(...columns);
    await sendFiles(...columns);
    await ask("GET", "/ensembles/{id}", on.ensemble);
    await ask("GET", "/ensembles/{id}/comparison", `${on.ensemble}/comparison?level=A&reference=B`);
    await ask("GET", "/ensembles/{id}/comparison", `${on.ensemble}/comparison?level=A&reference=none`);
    const request = { level: "A", rmsdTolerance: 0.31, window: 1 };
    const sift = await send("/ensembles/{id}/sifts", `${on.ensemble}/sifts`, request);
    await send("/ensembles/{id}/sifts", `${on.ensemble}/sifts`, { level: "none" });
    await ask("GET", "/sifts/{id}", `/sifts/${sift.id}`);
    await ask("GET", "/sifts/{id}", `/sifts/${sift.id}?wait=60`);
    await ask("DELETE", "/sifts/{id}", `/sifts/${sift.id}`);
    await ask("GET", "/sifts/{id}/populations", `${on.sift}/populations?temperature=310`);
    await ask("GET", "/sifts/{id}/populations", `${on.sift}/populations?temperature=cold`);
    await ask("GET", "/sifts/{id}/averages.csv", `${on.sift}/averages.csv?sigma=0.5`);
    for (const ending of ["xyz", "sdf", "csv", "json"]) {
      await ask("GET", `/sifts/{id}/export.${ending}`, `${on.sift}/export.${ending}`);
    }
    await ask("GET", "/openapi.json", "/openapi.json", { token: undefined });
  });

  it("were had of every call and every way in which it can work", () => {
    const described = operations.flatMap(({ operation }) =>
      Object.keys(operation.responses)
        .filter((status) => status < "300")
        .map((status) => `${operation.operationId} ${status}`),
    );
    expect([...met].filter((one) => / 2\d\d$/.test(one)).sort()).toEqual(described.sort());
    const refused = [...met].map((one) => one.split(" ")[1]).filter((status = "") => status >= "400");
    expect([...new Set(refused)].sort()).toEqual(["401", "403", "404", "409", "415", "422"]);
  });
});

it("answers problem documents for addresses that do not exist, whatever the method", async () => {
  for (const path of ["/nothing", "/ensembles/x/y", "/sifts/x/export.pdf"]) {
    for (const method of ["GET", "POST", "DELETE"]) {
      const response = await call(`/api/v1${path}`, { method, token: tokens.analyst });
      expect(response.status, `${method} ${path}`).toBe(404);
      expect(response.headers.get("content-type")).toContain("application/problem+json");
    }
  }
});

it("never caches, and never lets a browser guess types (B08)", async () => {
  const response = await call(on("/ensembles/:id"), { token: tokens.analyst });
  expect(response.headers.get("cache-control")).toBe("no-store");
  expect(response.headers.get("x-content-type-options")).toBe("nosniff");
});
