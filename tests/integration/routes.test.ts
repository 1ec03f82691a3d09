import { beforeAll, describe, expect, it } from "vitest";
import { newId } from "~/db/new-id.server";
import { makeMember, makeTeam, tokenOf } from "../factories/people";
import { makeEnsembleRow, makeSiftRow } from "../factories/rows";
import { call, ORIGIN, routeRows, type TableRow } from "../setup/app";

// Every address that names an object, taken from app/routes.ts itself: a new route is in here without a line of
// anybody's, and fails until a service decides who may see what it shows.

const rows = routeRows();
const byId = new Map(rows.map((row) => [row.id, row]));

function patternOf(row: TableRow): string {
  const parent = row.parentId === undefined ? undefined : byId.get(row.parentId);
  return `${parent ? patternOf(parent) : ""}${row.path ? `/${row.path}` : ""}`;
}

const PATTERNS = [...new Set(rows.map(patternOf))].filter((pattern) => /:(team|id)\b/.test(pattern)).sort();
/** Calls and files that answer no GET. */
const ACTS_ONLY = /^\/(api|files)\/.*\/(answers|reread|release|hold|sifts|files|columns)$/;
const isCall = (pattern: string) => /^\/(api|files)\//.test(pattern);

const ids = { team: "", ensemble: "", sift: "" };
const people = { outsider: "", outsiderToken: "", readerToken: "", reader: "", addToken: "" };

beforeAll(async () => {
  const team = await makeTeam();
  const other = await makeTeam();
  const reader = await makeMember(team.id, "reader");
  const analyst = await makeMember(team.id, "analyst");
  const outsider = await makeMember(other.id, "owner");
  ids.team = team.id;
  ids.ensemble = await makeEnsembleRow(team.id);
  ids.sift = await makeSiftRow(ids.ensemble);
  people.reader = reader.cookie;
  people.readerToken = await tokenOf(reader.id, team.id);
  people.addToken = await tokenOf(analyst.id, team.id, "add");
  people.outsider = outsider.cookie;
  people.outsiderToken = await tokenOf(outsider.id, other.id);
});

/** The address with ids of objects of the team, or with ids that were never given. */
function fill(pattern: string, known: boolean): string {
  const id = /\/sifts\/:id/.test(pattern) ? ids.sift : ids.ensemble;
  return pattern
    .replace(":team", known ? ids.team : newId())
    .replace(":id", known ? id : newId())
    .replace(":frame", "1")
    .replace(":position", "0")
    .replace(":number", "1")
    .replace(":name", "results.csv")
    .replace("/*", "/nothing");
}

/** What an answer tells, without what differs from answer to answer. */
async function told(answer: Response, path: string): Promise<string> {
  const location = answer.headers.get("location")?.replace(encodeURIComponent(path), "HERE") ?? "";
  const text = (await answer.text())
    .replaceAll(path, "HERE")
    .replaceAll(/nonce="[^"]*"/g, "")
    .replaceAll(/[a-z2-7]{16}/g, "ID");
  return `${answer.status} ${location} ${text}`;
}

async function same(pattern: string, method: string, who: { cookie?: string; token?: string }) {
  const ask = async (known: boolean) => {
    const path = fill(pattern, known);
    const body = method === "GET" ? undefined : "{}";
    const headers = { "content-type": "application/json" };
    const origin = who.token === undefined ? ORIGIN : null;
    const answer = await call(path, { method, body, headers, origin, ...who });
    return { status: answer.status, words: await told(answer, path) };
  };
  const [foreign, missing] = [await ask(true), await ask(false)];
  expect(foreign.words, `${method} ${pattern}`).toBe(missing.words);
  return foreign.status;
}

describe("objects of another team look like objects that are not there (C02)", () => {
  it("has routes to look at", () => {
    expect(PATTERNS.length).toBeGreaterThan(20);
  });

  it.each(PATTERNS)("at %s, for a member of another team", async (pattern) => {
    const who = pattern.startsWith("/api/") ? { token: people.outsiderToken } : { cookie: people.outsider };
    // Where only acts are known a GET is 405, for everybody alike; which these are stands in the access matrix.
    expect(await same(pattern, "GET", who)).toBe(ACTS_ONLY.test(pattern) ? 405 : 404);
    if (isCall(pattern)) {
      expect([404, 405]).toContain(await same(pattern, "POST", who));
      expect([404, 405]).toContain(await same(pattern, "DELETE", who));
    }
  });

  it.each(PATTERNS)("at %s, for nobody", async (pattern) => {
    const status = await same(pattern, "GET", {});
    if (pattern.startsWith("/api/")) expect(status).toBe(401);
    else if (pattern.startsWith("/teams/")) expect(status).toBe(302);
    else expect([302, 404, 405]).toContain(status);
  });
});

describe("a reader", () => {
  it("sees what the team holds", async () => {
    for (const pattern of ["/teams/:team", "/teams/:team/tokens", "/ensembles/:id/logbook"]) {
      expect((await call(fill(pattern, true), { cookie: people.reader })).status, pattern).toBe(200);
    }
    const answer = await call(fill("/api/v1/ensembles/:id", true), { token: people.readerToken });
    expect(answer.status).toBe(200);
    expect(await answer.json()).toMatchObject({ id: ids.ensemble });
  });

  const ACTS: [string, string][] = [
    ["POST", "/api/v1/ensembles"],
    ["POST", "/api/v1/ensembles/:id/files"],
    ["POST", "/api/v1/ensembles/:id/answers"],
    ["POST", "/api/v1/ensembles/:id/reread"],
    ["POST", "/api/v1/ensembles/:id/frames/:frame/release"],
    ["POST", "/api/v1/ensembles/:id/frames/:frame/hold"],
    ["POST", "/api/v1/ensembles/:id/sifts"],
    ["DELETE", "/api/v1/sifts/:id"],
    ["POST", "/api/v1/ensembles/:id/columns"],
    ["POST", "/files/ensembles/:id/files"],
    ["POST", "/files/ensembles/:id/columns"],
    ["POST", "/files/ensembles/:id/sifts"],
    ["POST", "/files/sifts/:id/pair-matrix"],
    ["DELETE", "/files/sifts/:id"],
  ];

  it.each(ACTS)("may not %s %s, whatever the body holds", async (method, pattern) => {
    const who = pattern.startsWith("/api/")
      ? { token: people.readerToken, origin: null }
      : { cookie: people.reader };
    for (const [type, body] of [
      ["application/json", "{}"],
      ["application/json", "no json"],
      ["text/html", "<p>"],
    ] as const) {
      const answer = await call(fill(pattern, true), {
        method,
        body,
        headers: { "content-type": type },
        ...who,
      });
      expect(answer.status).toBe(403);
      expect(await answer.json()).toMatchObject({
        status: 403,
        detail: expect.stringContaining("analyst or owner"),
      });
    }
  });
});

describe("a token narrowed to adding (D08)", () => {
  it.each(PATTERNS.filter((pattern) => pattern.startsWith("/api/")))(
    "sees nothing of others at %s",
    async (pattern) => {
      const status = await same(pattern, "GET", { token: people.addToken });
      expect([404, 405]).toContain(status);
    },
  );
});

it("tells a reader that an edition is not theirs to freeze, whatever the form holds", async () => {
  const forms: Record<string, string>[] = [{ intent: "freeze" }, { intent: "freeze", sift: ids.sift }];
  for (const form of forms) {
    const path = `/ensembles/${ids.ensemble}/hand-over`;
    expect((await call(path, { form, cookie: people.reader })).status).toBe(403);
  }
});
