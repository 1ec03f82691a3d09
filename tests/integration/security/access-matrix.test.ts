import { readFileSync } from "node:fs";
import path from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { throttles } from "~/db/schema.server";
import { type FilledTeam, fillTeam } from "../../factories/filled-team";
import { makeMember, makeTeam, tokenOf } from "../../factories/people";
import { withJobs } from "../../factories/upload";
import { call, ORIGIN, routeRows, type TableRow } from "../../setup/app";

// The access matrix: who gets which status at every address of app/routes.ts, by every method that it answers, for
// objects of the own team, of another team and for none. A new route fails here until it has its rule.

/** Callers in the order of the cells: four browsers signed in, one not, then bearers of tokens. */
const WHO = ["owner", "analyst", "reader", "outsider", "nobody"] as const;
const BEARERS = ["full", "reader's", "read", "add", "other team's", "browser of an owner"] as const;

/** One line for each method: statuses of WHO for pages and files, of BEARERS for the API. A page knows no tokens. */
type Rule = Partial<Record<"GET" | "POST" | "DELETE", string>>;

const everybody = (status: number) => Array.from({ length: WHO.length }, () => status).join(" ");
const READ_PAGE = "200 200 200 404 404";
const READ_TEAM_PAGE = "200 200 200 404 302";
const PUBLIC: Rule = { GET: everybody(200), POST: everybody(405) };
/** A form with nothing in it, at a door that anybody may knock at. */
const door = (get: string, post: number): Rule => ({ GET: get, POST: everybody(post) });
const SECTION: Rule = { GET: READ_PAGE, POST: "405 405 405 404 404" };
/** Acts have a table of their own below; here the form names none. */
const ACTS: Rule = { GET: READ_PAGE, POST: "404 404 404 404 404" };
const FILE: Rule = { GET: READ_PAGE, POST: everybody(405), DELETE: everybody(405) };
const SHARED: Rule = { GET: everybody(200), POST: everybody(405), DELETE: everybody(405) };
const NO_BEARER = " 401";
const API_405 = `405 405 405 405 405${NO_BEARER}`;
const API_READ: Rule = { GET: `200 200 200 404 404${NO_BEARER}`, POST: API_405, DELETE: API_405 };
/** An act whose body `{}` is not right: the role decides before the body is looked at. */
const apiAct = (reached: number): Rule => ({
  GET: API_405,
  POST: `${reached} 403 403 404 404${NO_BEARER}`,
  DELETE: API_405,
});

const RULES: Record<string, Rule> = {
  "/": PUBLIC,
  "/methods": PUBLIC,
  "/formats": PUBLIC,
  "/words": PUBLIC,
  "/api": PUBLIC,
  "/healthz": PUBLIC,
  "/readyz": PUBLIC,
  "/*": { GET: everybody(404), POST: everybody(404) },
  "/theme": door(everybody(404), 303),
  "/mail": PUBLIC,

  "/login": { GET: "302 302 302 302 200", POST: "302 302 302 302 422" },
  "/logout": { GET: everybody(404) },
  "/sign-up": { GET: "302 302 302 302 200", POST: "302 302 302 302 403" },
  "/reset-password": door(everybody(200), 200),
  "/reset-password/:secret": door(everybody(404), 404),
  "/invitation/:secret": door(everybody(404), 404),
  "/confirm-address/:secret": door(everybody(404), 404),
  "/restore-account/:secret": door(everybody(404), 404),
  "/account": { GET: "200 200 200 200 302", POST: "400 400 400 400 302" },

  "/teams": { GET: everybody(302), POST: "405 405 405 405 302" },
  "/teams/:team": { GET: READ_TEAM_PAGE, POST: "405 405 405 404 302" },
  "/teams/:team/people": { GET: READ_TEAM_PAGE, POST: "400 400 400 404 302" },
  "/teams/:team/tokens": { GET: READ_TEAM_PAGE, POST: "400 400 400 404 302" },
  "/teams/:team/logbook": { GET: READ_TEAM_PAGE, POST: "400 400 400 404 302" },
  "/teams/:team/windows": { GET: READ_TEAM_PAGE, POST: "405 405 405 404 302" },

  "/ensembles/:id": { GET: "302 302 302 404 404", POST: "405 405 405 404 404" },
  "/ensembles/:id/intake": ACTS,
  "/ensembles/:id/distinct-set": ACTS,
  "/ensembles/:id/compare": ACTS,
  "/ensembles/:id/populations": SECTION,
  "/ensembles/:id/columns": ACTS,
  "/ensembles/:id/levels": SECTION,
  "/ensembles/:id/plan": ACTS,
  "/ensembles/:id/averages": ACTS,
  "/ensembles/:id/trust": SECTION,
  "/ensembles/:id/hand-over": ACTS,
  "/ensembles/:id/logbook": { GET: READ_PAGE, POST: "400 400 400 404 404" },
  "/ensembles/:id/editions/:number": { GET: READ_PAGE, POST: everybody(405) },

  "/files/ensembles/:id/logbook.csv": FILE,
  "/files/teams/:team/logbook.csv": FILE,
  "/files/ensembles/:id/editions/:number/files/:name": FILE,
  "/files/ensembles/:id/editions/:number/positions": FILE,
  "/files/ensembles/:id/coordinates": FILE,
  "/files/ensembles/:id/accepted": FILE,
  "/files/ensembles/:id/sources/:position": FILE,
  "/files/matrices/:id/distances.csv": FILE,
  "/files/sifts/:id/outside.csv": FILE,
  "/files/sifts/:id/export.xyz": FILE,
  "/files/sifts/:id/export.sdf": FILE,
  "/files/sifts/:id/export.csv": FILE,
  "/files/sifts/:id/export.json": FILE,
  "/files/sifts/:id/averages.csv": FILE,
  // Which team is meant stands in the body.
  "/files/upload": { GET: "200 200 200 200 404", POST: "415 415 415 415 404", DELETE: everybody(405) },
  "/files/ensembles/:id/files": { GET: everybody(405), POST: "415 415 403 404 404", DELETE: everybody(405) },
  "/files/ensembles/:id/columns": {
    GET: everybody(405),
    POST: "415 415 403 404 404",
    DELETE: everybody(405),
  },
  "/files/ensembles/:id/sifts": { GET: everybody(405), POST: "422 422 403 404 404", DELETE: everybody(405) },
  "/files/sifts/:id/pair-matrix": {
    GET: READ_PAGE,
    POST: "202 202 403 404 404",
    DELETE: everybody(405),
  },
  "/files/sifts/:id": { GET: READ_PAGE, POST: everybody(405), DELETE: "202 202 403 404 404" },
  "/files/matrices/:id": { GET: READ_PAGE, POST: everybody(405), DELETE: "202 202 403 404 404" },

  // A guest is whoever holds the secret, signed in or not.
  "/e/:token": { GET: everybody(200), POST: everybody(405) },
  "/e/:token/files/:name": SHARED,
  "/e/:token/sources/:position": SHARED,
  "/e/:token/positions": SHARED,

  "/api/v1": { GET: `404 404 404 404 404${NO_BEARER}` },
  "/api/v1/*": { GET: `404 404 404 404 404${NO_BEARER}`, POST: `404 404 404 404 404${NO_BEARER}` },
  "/api/v1/openapi.json": { GET: "200 200 200 200 200 200", POST: API_405 },
  "/api/v1/ensembles": {
    GET: `200 200 200 200 200${NO_BEARER}`,
    POST: `415 403 403 415 415${NO_BEARER}`,
    DELETE: API_405,
  },
  "/api/v1/ensembles/:id": API_READ,
  "/api/v1/ensembles/:id/comparison": API_READ,
  "/api/v1/ensembles/:id/files": apiAct(415),
  "/api/v1/ensembles/:id/columns": apiAct(415),
  "/api/v1/ensembles/:id/answers": apiAct(422),
  "/api/v1/ensembles/:id/reread": apiAct(422),
  "/api/v1/ensembles/:id/frames/:frame/release": apiAct(422),
  "/api/v1/ensembles/:id/frames/:frame/hold": apiAct(422),
  "/api/v1/ensembles/:id/sifts": apiAct(422),
  "/api/v1/sifts/:id": { ...API_READ, DELETE: `202 403 403 404 404${NO_BEARER}` },
  "/api/v1/sifts/:id/populations": API_READ,
  "/api/v1/sifts/:id/export.xyz": API_READ,
  "/api/v1/sifts/:id/export.sdf": API_READ,
  "/api/v1/sifts/:id/export.csv": API_READ,
  "/api/v1/sifts/:id/export.json": API_READ,
  "/api/v1/sifts/:id/averages.csv": API_READ,
};

const rows = routeRows();
const byId = new Map(rows.map((row) => [row.id, row]));

function patternOf(row: TableRow): string {
  const parent = row.parentId === undefined ? undefined : byId.get(row.parentId);
  return `${parent ? patternOf(parent) : ""}${row.path ? `/${row.path}` : ""}`;
}
const PATTERNS = [...new Set(rows.map((row) => patternOf(row) || "/"))];

interface Caller {
  cookie?: string;
  token?: string;
}
let runner: Awaited<ReturnType<typeof withJobs>>;
let own: FilledTeam;
const callers: Record<string, Caller> = {};

beforeAll(async () => {
  runner = await withJobs();
  own = await fillTeam();
  const other = await makeTeam();
  const outsider = await makeMember(other.id, "owner");
  const { owner, analyst, reader } = own.people;
  Object.assign(callers, {
    owner: { cookie: owner.cookie },
    analyst: { cookie: analyst.cookie },
    reader: { cookie: reader.cookie },
    outsider: { cookie: outsider.cookie },
    nobody: {},
    full: { token: own.tokens.full },
    "reader's": { token: own.tokens.reader },
    read: { token: own.tokens.read },
    add: { token: own.tokens.add },
    "other team's": { token: await tokenOf(outsider.id, other.id) },
    "browser of an owner": { cookie: owner.cookie },
  });
}, 120_000);
afterAll(() => runner.stop());

/** Options without which a call would be refused for what it asks, not for who asks. */
const QUERY: Record<string, string> = {
  "/api/v1/ensembles/:id/comparison": "?level=A&reference=B",
  "/files/ensembles/:id/coordinates": "?frames=1",
};

function addressOf(pattern: string, ids: { object?: string; team?: string; secret?: string } = {}): string {
  const { ensemble, sift, matrix, team, secret, number } = own.ids;
  const object = /matrices/.test(pattern) ? matrix : /sifts\/:id/.test(pattern) ? sift : ensemble;
  const filled = pattern
    .replace(":team", ids.team ?? team)
    .replace(":id", ids.object ?? object)
    .replace(":token", ids.secret ?? secret)
    .replace(":secret", "x".repeat(43))
    .replace(":frame", "1")
    .replace(":position", "0")
    .replace(":number", number)
    .replace(":name", "results.csv")
    .replace("/*", "/nothing");
  return `${filled}${QUERY[pattern] ?? ""}`;
}

async function statusOf(address: string, method: string, caller: Caller): Promise<number> {
  const forProgram = /^\/(api|files)\//.test(address);
  const sent = forProgram
    ? { body: "{}", headers: { "content-type": "application/json" } }
    : { body: "intent=", headers: { "content-type": "application/x-www-form-urlencoded" } };
  const origin = caller.token === undefined ? ORIGIN : null;
  const answer = await call(address, { method, origin, ...(method === "GET" ? {} : sent), ...caller });
  await answer.arrayBuffer();
  return answer.status;
}

describe("the access matrix (C01, C02)", () => {
  it("has a rule for every address of the table of routes, and for no other", () => {
    expect(PATTERNS.toSorted()).toEqual(Object.keys(RULES).toSorted());
  });

  it.each(Object.entries(RULES))(
    "at %s",
    async (pattern, rule) => {
      await db.delete(throttles);
      const names: readonly string[] = pattern.startsWith("/api/v1") ? BEARERS : WHO;
      const found: Rule = {};
      for (const method of Object.keys(rule) as (keyof Rule)[]) {
        const cells: number[] = [];
        for (const name of names) {
          const caller = callers[name] ?? {};
          cells.push(await statusOf(addressOf(pattern), method, caller));
        }
        found[method] = cells.join(" ");
      }
      expect(found).toEqual(rule);
    },
    60_000,
  );

  it.each(PATTERNS.filter((pattern) => /:(team|id|token)\b/.test(pattern)))(
    "at %s, for what is not there: nobody sees more than of another team's",
    async (pattern) => {
      await db.delete(throttles);
      const names = pattern.startsWith("/api/v1")
        ? (["full", "add"] as const)
        : (["owner", "nobody"] as const);
      const nothing = { object: newId(), team: newId(), secret: "a".repeat(32) };
      for (const name of names) {
        const status = await statusOf(addressOf(pattern, nothing), "GET", callers[name] ?? {});
        const expected = name === "nobody" && pattern.startsWith("/teams/") ? [302] : [404, 405];
        expect(expected, name).toContain(status);
      }
    },
    60_000,
  );
});

/** Every act that a form of a page can name, the fields that let it through to its service, and who then gets what. */
interface Act {
  at: string;
  intent: string;
  fields?: () => Record<string, string>;
  /** owner, analyst, reader; an outsider always gets 404. */
  cells: string;
}

const ANALYSTS = (reached: number) => `${reached} ${reached} 403`;
const OWNERS = (reached: number) => `${reached} 403 403`;
const PLAIN_SIFT = { atoms: "all", mirror: "auto", chirality: "auto", symmetry: "on" };
const FORM_ACTS: Act[] = [
  // Ids that are not there, or names that do not fit: the role decides first, the object after it.
  ...[
    ["answer", { question: "none", option: "x" }, 422],
    ["hold", { frame: "999", reason: "r" }, 404],
    ["release", { frame: "999", reason: "r" }, 404],
    ["split-off", { frame: "999" }, 404],
    ["reread", { energyFrom: "key:none", energyUnit: "kcal/mol", level: "A" }, 422],
    ["rename", { name: "Butane" }, 200],
  ].map(([intent, fields, reached]) =>
    act("/ensembles/:id/intake", intent, fields, ANALYSTS(Number(reached))),
  ),
  ...["remove", "remove-added", "restore", "change", "derive", "use-as-level", "use-as-property"].map(
    (intent) =>
      act(
        "/ensembles/:id/columns",
        intent,
        { column: "none", name: "N", expression: "nothing here", unit: "kcal/mol", energyKind: "electronic" },
        ANALYSTS(intent === "derive" ? 422 : 404),
      ),
  ),
  // Checking a formula stores nothing.
  act("/ensembles/:id/columns", "check", { expression: "1" }, "200 200 200"),
  // So does looking at the lowest and highest number of a column.
  act("/ensembles/:id/columns", "span", { column: "none" }, "404 404 404"),
  act("/ensembles/:id/averages", "rule", { column: "none", rule: "linear" }, ANALYSTS(404)),
  act("/ensembles/:id/averages", "observe", { observable: "distance", atoms: "1,999" }, ANALYSTS(422)),
  act("/ensembles/:id/averages", "split", { parts: "1;999" }, ANALYSTS(422)),
  // Nothing was taken apart: there is nothing to do.
  act("/ensembles/:id/averages", "join", { atom: "1" }, ANALYSTS(200)),
  act("/ensembles/:id/averages", "measured", { record: "{}", version: "0" }, ANALYSTS(422)),
  act("/ensembles/:id/averages", "measured-properties", { record: "{}", version: "0" }, ANALYSTS(422)),
  act(
    "/ensembles/:id/distinct-set",
    "sift",
    { level: "none", rmsdTolerance: "0,2", ...PLAIN_SIFT },
    ANALYSTS(422),
  ),
  act("/ensembles/:id/compare", "remove", { outside: "none" }, ANALYSTS(404)),
  act("/ensembles/:id/compare", "restore", { outside: "none" }, ANALYSTS(404)),
  act("/ensembles/:id/plan", "save", { name: "Second", plans: "{}" }, ANALYSTS(422)),
  act("/ensembles/:id/plan", "remove", { id: "none" }, ANALYSTS(404)),
  act("/ensembles/:id/plan", "restore", { id: "none" }, ANALYSTS(404)),
  act(
    "/ensembles/:id/hand-over",
    "freeze",
    { sift: "a".repeat(16), temperature: "298.15", weights: "auto" },
    ANALYSTS(404),
  ),
  act("/ensembles/:id/hand-over", "verify", { number: "99" }, ANALYSTS(404)),
  act("/ensembles/:id/hand-over", "make-link", { number: "99", label: "x", days: "3" }, ANALYSTS(404)),
  act("/ensembles/:id/hand-over", "end-link", { link: "@link" }, ANALYSTS(200)),
  act("/ensembles/:id/logbook", "", { text: "A remark" }, "200 200 200"),
  act("/teams/:team/logbook", "", { text: "A remark" }, "200 200 200"),
  act("/teams/:team?index", "new-series", { name: "Two" }, "409 200 403"),
  act("/teams/:team?index", "rename", { ensemble: "@ensemble", name: "Butane" }, ANALYSTS(200)),
  act("/teams/:team?index", "move", { ensemble: "@ensemble", series: "none" }, ANALYSTS(404)),
  // Of what is not deleted there is nothing to bring back, for nobody.
  act("/teams/:team?index", "restore", { ensemble: "@ensemble" }, "404 404 404"),
  act("/teams/:team/people", "invite", { email: "new@lab.example", role: "reader" }, OWNERS(200)),
  act("/teams/:team/people", "withdraw", { invitation: "none" }, OWNERS(404)),
  act("/teams/:team/people", "role", { person: "none", role: "reader" }, OWNERS(404)),
  act("/teams/:team/people", "remove", { person: "none" }, OWNERS(404)),
  act("/teams/:team/people", "settings", { name: "Estuary", linkDays: "30" }, OWNERS(200)),
  act("/teams/:team/people", "delete", { confirm: "another name" }, OWNERS(422)),
  // Another's token is there for owners alone.
  act("/teams/:team/tokens", "revoke", { token: "@token" }, "200 404 404"),
  act("/teams/:team/tokens", "", { name: "t", scope: "read", days: "1" }, "200 200 200"),
  act("/teams/:team/tokens", "", { name: "t", scope: "full", days: "1" }, "200 200 403"),
];

function act(at: string, intent: unknown, fields: unknown, cells: string): Act {
  const ids = () => own.ids as Record<string, string>;
  const filled = () =>
    Object.fromEntries(
      Object.entries(fields as Record<string, string>).map(([key, value]) => [
        key,
        value.startsWith("@") ? (ids()[value.slice(1)] ?? "") : value,
      ]),
    );
  return { at, intent: String(intent), fields: filled, cells };
}

/** Acts that change who is there, or the caller's own account: each has its test in team-people.test.ts. */
const ELSEWHERE = new Set(["team/series.tsx delete", "team/people.tsx leave"]);
const OWN_ACCOUNT = "account.tsx";

describe("acts of pages (C01, C02)", () => {
  it("are all in the table", () => {
    const listed = new Set(FORM_ACTS.map(({ at, intent }) => `${fileOf(at)} ${intent}`));
    const missing = rows.flatMap(({ file }) => {
      const source = readFileSync(path.join(import.meta.dirname, "../../../app", file), "utf8");
      const short = file.replace("routes/", "");
      if (short === OWN_ACCOUNT) return [];
      const named = [...source.matchAll(/case "([a-z-]+)"|intent(?:"\))? [!=]== "([a-z-]+)"/g)];
      return named
        .map((match) => `${short} ${match[1] ?? match[2]}`)
        .filter((name) => !listed.has(name) && !ELSEWHERE.has(name));
    });
    expect(missing).toEqual([]);
  });

  it.each(FORM_ACTS.map((one) => [`${one.at} ${one.intent}`, one] as const))("%s", async (_name, one) => {
    const send = async (name: string) => {
      const form = { ...(one.intent === "" ? {} : { intent: one.intent }), ...one.fields?.() };
      const answer = await call(
        addressOf(one.at.split("?")[0] ?? "") + (one.at.includes("?") ? "?index" : ""),
        {
          form,
          ...callers[name],
        },
      );
      await answer.arrayBuffer();
      return answer.status;
    };
    // The least role first, so that what an owner does cannot be what refuses the others.
    const [outsider, reader, analyst, owner] = [
      await send("outsider"),
      await send("reader"),
      await send("analyst"),
      await send("owner"),
    ];
    expect(`${owner} ${analyst} ${reader}`).toBe(one.cells);
    expect(outsider).toBe(404);
    expect([302, 404]).toContain(await send("nobody"));
  });
});

function fileOf(at: string): string {
  const pattern = at.split("?")[0] ?? "";
  const found = rows.filter((row) => patternOf(row) === pattern);
  return (found.at(-1)?.file ?? "").replace("routes/", "");
}
