import { desc, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { mailQueue, throttles } from "~/db/schema.server";
import { settleBackground } from "~/services/background.server";
import { type FilledTeam, fillTeam } from "../../factories/filled-team";
import { makeMember, makeTeam, PASSWORD } from "../../factories/people";
import { changesBetween, snapshotTables } from "../../factories/table-snapshot";
import { withJobs } from "../../factories/upload";
import { call, routeRows, type TableRow } from "../../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let own: FilledTeam;
let outsider: { id: string; email: string; cookie: string };
const secrets: Record<string, string> = {};

/** The secret in the newest letter to somebody. */
async function mailed(email: string, path: string): Promise<string> {
  await settleBackground();
  const letters = await db
    .select({ body: mailQueue.body })
    .from(mailQueue)
    .where(eq(mailQueue.recipient, email))
    .orderBy(desc(mailQueue.createdAt));
  const found = letters.map(({ body }) => new RegExp(`/${path}/([\\w-]{43})`).exec(body)?.[1]);
  return found.find((secret) => secret !== undefined) ?? "";
}

beforeAll(async () => {
  runner = await withJobs();
  own = await fillTeam();
  const other = await makeTeam();
  outsider = await makeMember(other.id, "owner");
  const leaving = await makeMember(other.id, "reader");
  await call("/reset-password", { form: { email: outsider.email } });
  await call("/account", {
    form: { intent: "address", email: "new-address@lab.example", current: PASSWORD },
    cookie: outsider.cookie,
  });
  await call("/account", { form: { intent: "delete", confirm: PASSWORD }, cookie: leaving.cookie });
  secrets.invitation = await mailed(`guest-${own.ids.team}@lab.example`, "invitation");
  secrets["reset-password"] = await mailed(outsider.email, "reset-password");
  secrets["confirm-address"] = await mailed("new-address@lab.example", "confirm-address");
  secrets["restore-account"] = await mailed(leaving.email, "restore-account");
}, 120_000);
afterAll(() => runner.stop());

const rows = routeRows();
const byId = new Map(rows.map((row) => [row.id, row]));
function patternOf(row: TableRow): string {
  const parent = row.parentId === undefined ? undefined : byId.get(row.parentId);
  return `${parent ? patternOf(parent) : ""}${row.path ? `/${row.path}` : ""}`;
}
const PATTERNS = [...new Set(rows.map((row) => patternOf(row) || "/"))];

function addressOf(pattern: string): string {
  const { ensemble, sift, matrix, team, secret, number } = own.ids;
  return pattern
    .replace(":team", team)
    .replace(":id", /matrices/.test(pattern) ? matrix : /sifts\/:id/.test(pattern) ? sift : ensemble)
    .replace(":token", secret)
    .replace(":secret", secrets[pattern.split("/")[1] ?? ""] ?? "")
    .replace(":frame", "1")
    .replace(":position", "0")
    .replace(":number", number)
    .replace(":name", "results.csv")
    .replace("/*", "/nothing");
}

/** Entries that a download or an opened link leaves in the logbook: they tell of looking, and change nothing. */
const NOTES = /"type","(export|edition-exported|source-downloaded|link-opened|link-exported)"/;

describe("GET and HEAD", () => {
  it("have live secrets of letters to look at", () => {
    for (const [name, secret] of Object.entries(secrets)) expect(secret, name).toMatch(/^[\w-]{43}$/);
  });

  it("change nothing at any address, for any role, over a team that holds one of everything (B02)", async () => {
    const callers = {
      owner: { cookie: own.people.owner.cookie },
      reader: { cookie: own.people.reader.cookie },
      outsider: { cookie: outsider.cookie },
      nobody: {},
      "full token": { token: own.tokens.full },
      "narrow token": { token: own.tokens.add },
    };
    const before = await snapshotTables();
    const reached = new Set<string>();
    for (const pattern of PATTERNS) {
      for (const caller of Object.values(callers)) {
        // The API knows tokens, pages know browsers; nobody goes everywhere.
        const misplaced = "token" in caller !== pattern.startsWith("/api/v1");
        if (misplaced && Object.keys(caller).length > 0) continue;
        // As a form's act would be asked for, were it looked for in the address.
        const address = `${addressOf(pattern)}?intent=delete&frames=1&level=A&reference=B`;
        await db.delete(throttles);
        const answer = await call(address, caller);
        await answer.arrayBuffer();
        if (answer.status === 200) reached.add(pattern);
        await call(addressOf(pattern), { method: "HEAD", ...caller });
      }
    }
    // Not an empty walk: what can be read was read, mail confirmations and the shared edition among it.
    for (const pattern of ["/e/:token", "/invitation/:secret", "/reset-password/:secret"]) {
      expect(reached).toContain(pattern);
    }
    expect(reached).toContain("/confirm-address/:secret");
    expect(reached).toContain("/restore-account/:secret");
    expect(reached.size).toBeGreaterThan(50);
    const changes = changesBetween(before, await snapshotTables());
    const acts = changes.filter(({ table, row }) => !(table === "logbook" && NOTES.test(row)));
    expect(acts).toEqual([]);
    // The letters' links still do what they are for.
    const used = await call(`/confirm-address/${secrets["confirm-address"]}`, { method: "POST" });
    expect(used.status).toBeLessThan(400);
  }, 180_000);
});

describe("tokens in an address", () => {
  it("count for nothing, whatever they are called there (D07)", async () => {
    const { full } = own.tokens;
    for (const name of ["token", "access_token", "api_key", "authorization", "bearer"]) {
      for (const value of [full, `Bearer ${full}`]) {
        const query = `?${name}=${encodeURIComponent(value)}`;
        expect((await call(`/api/v1/ensembles${query}`)).status, name).toBe(401);
        expect((await call(`/files/ensembles/${own.ids.ensemble}/accepted${query}`)).status).toBe(404);
      }
    }
    const form = await call("/api/v1/ensembles", {
      method: "POST",
      origin: null,
      body: new URLSearchParams({ token: full, access_token: full }),
    });
    expect(form.status).toBe(401);
    expect((await call("/api/v1/ensembles", { token: full })).status).toBe(200);
  });
});
