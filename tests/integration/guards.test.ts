import { type RequestOptions, request } from "node:http";
import type { AddressInfo } from "node:net";
import { afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { application } from "~/application.server";
import * as environment from "~/env.server";
import { isOwnOrigin } from "~/middleware/same-origin.server";
import * as health from "~/services/health.server";
import * as people from "~/services/teams/find-person.server";
import { makeServer } from "../../scripts/lib/serve.mjs";
import { makeMember, makeTeam, tokenOf } from "../factories/people";
import { call, handle, ORIGIN } from "../setup/app";

let cookie = "";
let token = "";
let teamId = "";

beforeEach(async () => {
  const team = await makeTeam();
  const member = await makeMember(team.id, "analyst");
  teamId = team.id;
  cookie = member.cookie;
  token = await tokenOf(member.id, team.id);
});
afterEach(() => vi.restoreAllMocks());

/** One answer of every kind that the application gives. */
const KINDS: [string, () => Promise<Response>, number][] = [
  ["a page", () => call("/methods"), 200],
  ["the data of a page", () => call("/methods.data"), 200],
  ["a redirect", () => call(`/teams/${teamId}`), 302],
  ["a page that is not there", () => call("/no/such/page"), 404],
  ["an object that is not there", () => call("/ensembles/aaaaaaaaaaaaaaaa", { cookie }), 404],
  ["a refused form", () => call("/login", { form: { email: "x@lab.example", password: "x" } }), 422],
  ["a form from elsewhere", () => call("/login", { form: {}, origin: "https://evil.example" }), 403],
  ["a file from elsewhere", () => call("/files/upload", { method: "POST", cookie, origin: null }), 403],
  ["a wrong method", () => call("/methods", { method: "DELETE", cookie }), 405],
  ["a call without a token", () => call("/api/v1/ensembles"), 401],
  ["a call of nothing", () => call("/api/v1/nothing", { token }), 404],
  ["a list of the API", () => call("/api/v1/ensembles", { token }), 200],
  ["the description of the API", () => call("/api/v1/openapi.json"), 200],
  ["the look at health", () => call("/healthz"), 200],
  ["the look at readiness", () => call("/readyz"), 200],
];

describe("headers", () => {
  it.each(KINDS)("stand on %s (B04)", async (_kind, ask, status) => {
    const answer = await ask();
    expect(answer.status).toBe(status);
    const policy = answer.headers.get("content-security-policy") ?? "";
    for (const part of [
      "default-src 'none'",
      "object-src 'none'",
      "base-uri 'none'",
      "form-action 'self'",
      "frame-ancestors 'none'",
    ]) {
      expect(policy.split("; ")).toContain(part);
    }
    expect(policy).not.toContain("unsafe-eval");
    expect(policy.match(/'unsafe-inline'/g)).toHaveLength(1);
    expect(policy).toContain("style-src-attr 'unsafe-inline'");
    expect(answer.headers.get("x-content-type-options")).toBe("nosniff");
    expect(answer.headers.get("referrer-policy")).toBe("same-origin");
    expect(answer.headers.get("cross-origin-opener-policy")).toBe("same-origin");
    expect(answer.headers.get("permissions-policy")).toContain("camera=()");
    expect(answer.headers.get("cache-control")).toMatch(/no-store/);
    expect(answer.headers.get("x-request-id")).toMatch(/^[0-9a-f]{16}$/);
    expect(answer.headers.has("strict-transport-security")).toBe(false);
  });

  it("name https for a year where it is used (B04)", async () => {
    const real = environment.env();
    // why: settings are read once a process.
    vi.spyOn(environment, "env").mockReturnValue({ ...real, secure: true });
    const answer = await call("/methods");
    expect(answer.headers.get("strict-transport-security")).toBe("max-age=31536000; includeSubDomains");
  });

  it("carry a nonce that every script and style of the page has, new each time (B03)", async () => {
    const pages = await Promise.all([call("/login"), call("/login")]);
    const nonces = pages.map(
      (page) =>
        /script-src 'self' 'nonce-([\w-]{22})'/.exec(page.headers.get("content-security-policy") ?? "")?.[1],
    );
    expect(nonces[0]).toBeDefined();
    expect(nonces[0]).not.toBe(nonces[1]);
    for (const [i, page] of pages.entries()) {
      const html = await page.text();
      const elements = html.match(/<(script|style)\b[^>]*>/g) ?? [];
      expect(elements.length).toBeGreaterThan(2);
      for (const element of elements) expect(element).toContain(`nonce="${nonces[i]}"`);
      expect(html).not.toMatch(/\son[a-z]+="/);
    }
  });
});

/** The status of an answer to a request whose headers go as they are. */
function statusOver({ body, ...options }: RequestOptions & { body: string }): Promise<number | undefined> {
  return new Promise((resolve, reject) => {
    const sent = request({ host: "127.0.0.1", ...options }, (answer) => {
      answer.resume();
      answer.on("end", () => resolve(answer.statusCode));
    });
    sent.on("error", reject);
    sent.end(body);
  });
}

describe("unsafe requests", () => {
  const UNSAFE = ["POST", "PUT", "PATCH", "DELETE"];
  const FOREIGN: [string, string | null][] = [
    ["no page", null],
    ["a page without an origin", "null"],
    ["another site", "https://evil.example"],
    ["another port", "http://127.0.0.1:3001"],
    ["another scheme", "https://127.0.0.1:3000"],
    ["a name that begins like ours", "http://127.0.0.1:3000.evil.example"],
    ["no address at all", "javascript:alert(1)"],
  ];
  // Pages, their data, and addresses that only programs call.
  const ADDRESSES = [
    "/login",
    "/login.data",
    "/logout",
    "/theme",
    "/files/upload",
    "/teams",
    "/no/such/page",
  ];

  it.each(FOREIGN)("from %s are refused everywhere (B01)", async (_from, origin) => {
    for (const path of ADDRESSES) {
      for (const method of UNSAFE) {
        const answer = await call(path, { method, cookie, origin });
        expect(answer.status, `${method} ${path}`).toBe(403);
      }
    }
  });

  it("with bodies are refused over the line as soon as they came (B01)", async () => {
    const { server, listen, close } = makeServer({ application, handle, staticFolder: null });
    await listen(0, "127.0.0.1");
    const { port } = server.address() as AddressInfo;
    const bodies: [string, string][] = [
      ["application/x-www-form-urlencoded", "a=1"],
      [
        "multipart/form-data; boundary=b",
        '--b\r\ncontent-disposition: form-data; name="a"\r\n\r\n1\r\n--b--\r\n',
      ],
      ["text/plain", "x".repeat(500_000)],
    ];
    try {
      for (const origin of ["null", "foo", "https://evil.example", null]) {
        for (const address of ["/login", "/files/upload"]) {
          for (const [k, [type, body]] of bodies.entries()) {
            const named = origin === null ? {} : { origin };
            const headers = { "content-type": type, "content-length": body.length, cookie, ...named };
            const method = k === 0 ? "DELETE" : "POST";
            const sent = { method, headers, body, port, path: address };
            expect(await statusOver(sent), `${method} ${address} ${type} from ${origin}`).toBe(403);
          }
        }
      }
    } finally {
      await close(0);
    }
  });

  it.each([ORIGIN, "http://localhost:3000", "http://[::1]:3000"])("from %s are taken", async (origin) => {
    expect((await call("/theme", { form: { theme: "dark", back: "/methods" }, origin })).status).toBe(303);
  });

  it("of the API are judged by their token alone, whatever cookies come with it (B01)", async () => {
    const path = "/api/v1/ensembles/aaaaaaaaaaaaaaaa/sifts";
    const body = "{}";
    for (const jar of ["jar=1", cookie, undefined]) {
      for (const origin of [null, "null", "https://evil.example"]) {
        const ask = (method: string, more = {}) => call(path, { method, cookie: jar, origin, body, ...more });
        expect((await ask("POST", { token })).status).toBe(404);
        expect((await ask("DELETE", { token })).status).toBe(405);
        expect((await ask("POST")).status).toBe(401);
      }
    }
  });

  it("on https are compared with the public address alone", () => {
    const own = "https://lowlying.lab.example";
    expect(isOwnOrigin(own, own)).toBe(true);
    expect(isOwnOrigin("http://lowlying.lab.example", own)).toBe(false);
    expect(isOwnOrigin("http://127.0.0.1:3000", own)).toBe(false);
    expect(isOwnOrigin("https://lowlying.lab.example.evil.example", own)).toBe(false);
  });
});

describe("tokens and cookies", () => {
  it("end in problem documents at every address of the API, those of the router's pages too", async () => {
    for (const path of [
      "/api/v1/ensembles/aaaaaaaaaaaaaaaa.data",
      "/api/v1/ensembles.data",
      "/API/v1/_.data",
    ]) {
      for (const [options, status] of [
        [{ token }, 404],
        [{ token, method: "POST", body: "{}" }, 404],
        [{ cookie }, 401],
      ] as const) {
        const answer = await call(path, options);
        expect([answer.status, answer.headers.get("content-type")], path).toEqual([
          path.endsWith("a.data") && "method" in options ? 405 : status,
          "application/problem+json; charset=utf-8",
        ]);
      }
    }
  });

  it("do not stand in for each other (D07)", async () => {
    expect((await call("/api/v1/ensembles", { cookie })).status).toBe(401);
    const page = await call(`/teams/${teamId}`, { token });
    expect(page.headers.get("location")).toContain("/login");
    expect((await call(`/api/v1/ensembles?token=${token}`)).status).toBe(401);
    expect((await call(`/api/v1/ensembles?access_token=${token}`)).status).toBe(401);
  });

  it("answer 401 in one form for every bad token", async () => {
    const bad = ["", "x", `${token}x`, token.replace("lowl_", "owl_"), `lowl_${"A".repeat(43)}`];
    for (const one of bad) {
      const answer = await call("/api/v1/ensembles", { headers: { authorization: `Bearer ${one}` } });
      expect(answer.status).toBe(401);
      expect(answer.headers.get("content-type")).toContain("application/problem+json");
      expect(answer.headers.get("www-authenticate")).toContain("Bearer");
      expect(await answer.json()).toMatchObject({ status: 401, title: expect.any(String) });
    }
    expect((await call("/api/v1/ensembles", { headers: { authorization: `Basic ${token}` } })).status).toBe(
      401,
    );
  });

  it("decide before the body is looked at", async () => {
    const answer = await call("/api/v1/ensembles", {
      method: "POST",
      origin: null,
      headers: { "content-type": "text/html" },
      body: "no form at all",
    });
    expect(answer.status).toBe(401);
  });

  it("hold callers without a valid token to 600 calls a minute an address", async () => {
    const ask = () => call("/api/v1/openapi.json", { address: "203.0.113.7" });
    const statuses: number[] = [];
    for (let i = 0; i < 601; i++) statuses.push((await ask()).status);
    expect(new Set(statuses.slice(0, 600))).toEqual(new Set([200]));
    expect(statuses[600]).toBe(429);
    const refused = await ask();
    expect(Number(refused.headers.get("retry-after"))).toBeGreaterThan(0);
    expect((await call("/api/v1/openapi.json", { address: "203.0.113.8" })).status).toBe(200);
    expect((await call("/api/v1/ensembles", { token, address: "203.0.113.7" })).status).toBe(200);
  });
});

describe("a database that is away", () => {
  beforeEach(() => {
    // why: the server of the whole run cannot be taken away for one test; a process without one is tested by hand.
    vi.spyOn(health, "databaseAnswers").mockResolvedValue(false);
  });

  it.each(["/", "/login", "/methods", "/no/such/page"])(
    "shows %s a page that says so (F09)",
    async (path) => {
      const answer = await call(path, { cookie });
      expect(answer.status).toBe(503);
      expect(answer.headers.get("retry-after")).toBe("5");
      expect(await answer.text()).toContain("The server does not answer");
    },
  );

  it.each(["/api/v1/ensembles", "/files/sifts/aaaaaaaaaaaaaaaa"])("tells programs at %s", async (path) => {
    const answer = await call(path, { token, cookie });
    expect(answer.status).toBe(503);
    expect(answer.headers.get("retry-after")).toBe("5");
    expect(answer.headers.get("content-type")).toContain("problem+json");
  });

  it("leaves the process alive", async () => {
    expect((await call("/healthz")).status).toBe(200);
  });
});

describe("failures that nobody expected", () => {
  it("show an incident number and nothing of the cause (security G02)", async () => {
    vi.spyOn(people, "findPerson").mockRejectedValue(new Error("MARKER select * from users"));
    const answer = await call("/methods", { cookie });
    expect(answer.status).toBe(500);
    const page = await answer.text();
    expect(page).not.toContain("MARKER");
    const id = answer.headers.get("x-request-id")?.toUpperCase() ?? "";
    expect(page).toContain(`${id.slice(0, 4)}-${id.slice(4, 8)}`);
  });
});

describe("the theme", () => {
  it("is kept in a cookie and stands in the document before any script runs", async () => {
    const set = await call("/theme", { form: { theme: "dark", back: "/methods" } });
    expect(set.headers.get("location")).toBe("/methods");
    const [line = ""] = set.headers.getSetCookie();
    const page = await (await call("/methods", { cookie: line.split(";", 1)[0] })).text();
    expect(page).toMatch(/<html[^>]* data-theme="dark"/);
    expect(await (await call("/methods")).text()).not.toContain("data-theme");
  });

  it("leads back to our own pages only", async () => {
    const set = await call("/theme", { form: { theme: "dark", back: "//evil.example" } });
    expect(set.headers.get("location")).toBe("/");
  });
});
