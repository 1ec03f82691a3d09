import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { type FilledTeam, fillTeam } from "../../factories/filled-team";
import { signedIn } from "../../factories/people";
import { changesBetween, snapshotTables } from "../../factories/table-snapshot";
import { frame, post, withJobs } from "../../factories/upload";
import { call } from "../../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let own: FilledTeam;
let other: FilledTeam;

beforeAll(async () => {
  runner = await withJobs();
  own = await fillTeam("Estuary");
  other = await fillTeam("Headland");
}, 120_000);
afterAll(() => runner.stop());

/** A form of an owner's own page that names something of another team. */
const PAGE_ACTS: [page: string, fields: Record<string, string>][] = [
  ["/ensembles/:ensemble/columns", { intent: "remove", column: "@column" }],
  ["/ensembles/:ensemble/columns", { intent: "restore", column: "@column" }],
  ["/ensembles/:ensemble/columns", { intent: "change", column: "@column", name: "Mine" }],
  ["/ensembles/:ensemble/averages", { intent: "rule", column: "@column", rule: "linear" }],
  ["/ensembles/:ensemble/compare", { intent: "remove", outside: "@outside" }],
  ["/ensembles/:ensemble/compare", { intent: "restore", outside: "@outside" }],
  ["/ensembles/:ensemble/plan", { intent: "remove", id: "@plan" }],
  ["/ensembles/:ensemble/plan", { intent: "restore", id: "@plan" }],
  [
    "/ensembles/:ensemble/hand-over",
    { intent: "freeze", sift: "@sift", temperature: "298.15", weights: "auto", title: "T", remark: "R" },
  ],
  ["/ensembles/:ensemble/hand-over", { intent: "end-link", link: "@link" }],
  ["/teams/:team?index", { intent: "rename", ensemble: "@ensemble", name: "Mine" }],
  ["/teams/:team?index", { intent: "delete", ensemble: "@ensemble" }],
  ["/teams/:team?index", { intent: "restore", ensemble: "@ensemble" }],
  ["/teams/:team?index", { intent: "move", ensemble: "@ensemble", series: "@series" }],
  ["/teams/:team?index", { intent: "move", ensemble: "own ensemble", series: "@series" }],
  ["/teams/:team/people", { intent: "withdraw", invitation: "@invitation" }],
  ["/teams/:team/people", { intent: "role", person: "@reader", role: "owner" }],
  ["/teams/:team/people", { intent: "remove", person: "@reader" }],
  ["/teams/:team/tokens", { intent: "revoke", token: "@token" }],
];

function foreign(name: string): string {
  if (name === "own ensemble") return own.ids.ensemble;
  if (!name.startsWith("@")) return name;
  const key = name.slice(1);
  if (key === "reader") return other.people.reader.id;
  return (other.ids as Record<string, string>)[key] ?? "";
}

describe("ids of another team in a body or a query (C03)", () => {
  it.each(PAGE_ACTS)("of a form at %s: %j", async (page, fields) => {
    const before = await snapshotTables();
    const address = page.replace(":ensemble", own.ids.ensemble).replace(":team", own.ids.team);
    const form = Object.fromEntries(Object.entries(fields).map(([name, value]) => [name, foreign(value)]));
    for (const value of Object.values(form)) expect(value, "the test names a real object").not.toBe("");
    const answer = await call(address, { form, cookie: own.people.owner.cookie });
    expect(answer.status).toBe(404);
    expect(changesBetween(before, await snapshotTables())).toEqual([]);
  });

  it("in calls of the API: levels, references and sifts of others are unknown", async () => {
    const { full } = own.tokens;
    const { column, sift, ensemble } = other.ids;
    const before = await snapshotTables();
    const asked = await post(full, `/ensembles/${own.ids.ensemble}/sifts`, { level: column });
    expect(asked.status).toBe(422);
    const read = async (path: string) => (await call(`/api/v1${path}`, { token: full })).status;
    const comparison = `/ensembles/${own.ids.ensemble}/comparison`;
    expect(await read(`${comparison}?level=A&reference=B`)).toBe(200);
    expect(await read(`${comparison}?level=${column}&reference=B`)).toBe(422);
    expect(await read(`${comparison}?level=A&reference=${column}`)).toBe(422);
    expect([404, 422]).toContain(await read(`${comparison}?level=A&reference=B&sift=${sift}`));
    expect(await read(`/sifts/${own.ids.sift}/populations?level=${column}`)).toBe(422);
    expect(await read(`/sifts/${sift}/populations?level=A`)).toBe(404);
    expect(await read(`/ensembles/${ensemble}`)).toBe(404);
    const list = await call(`/api/v1/ensembles?series=${other.ids.series}`, { token: full });
    expect(JSON.stringify(await list.json())).not.toContain(ensemble);
    const answers = { answers: [{ id: "energy-unit", option: "hartree" }] };
    expect((await post(full, `/ensembles/${ensemble}/answers`, answers)).status).toBe(404);
    expect(changesBetween(before, await snapshotTables())).toEqual([]);
  });

  it("in addresses of pages and files", async () => {
    const { cookie } = own.people.owner;
    const status = async (path: string) => (await call(path, { cookie })).status;
    const at = own.ids.ensemble;
    expect(await status(`/ensembles/${at}/distinct-set?sift=${own.ids.sift}`)).toBe(200);
    expect(await status(`/ensembles/${at}/distinct-set?sift=${other.ids.sift}`)).toBe(404);
    expect(await status(`/ensembles/${at}/hand-over?sift=${other.ids.sift}`)).toBe(404);
    expect(await status(`/files/ensembles/${at}/accepted?level=${own.ids.column}`)).toBe(200);
    expect([404, 422]).toContain(await status(`/files/ensembles/${at}/accepted?level=${other.ids.column}`));
    expect(await status(`/teams/${own.ids.team}/windows?series=${other.ids.series}`)).toBe(404);
    const shown = await call(`/teams/${own.ids.team}?series=${other.ids.series}`, { cookie });
    expect(await shown.text()).not.toContain(other.ids.ensemble);
    // The secret of one link with the places of another edition.
    expect(await status(`/e/${own.ids.secret}/sources/99`)).toBe(404);
  });

  it("in the form that files come with, and in one's own account", async () => {
    const before = await snapshotTables();
    const form = new FormData();
    form.append("team", other.ids.team);
    form.append("file", new Blob([frame("energy=-9")]), "a.xyz");
    const sent = await call("/files/upload", {
      method: "POST",
      body: form,
      cookie: own.people.owner.cookie,
    });
    expect(sent.status).toBe(404);
    const session = await signedIn(other.people.owner.id);
    const { cookie } = own.people.owner;
    const sessions = await snapshotTables();
    const acts: Record<string, string>[] = [
      { intent: "session", session: other.people.owner.id },
      { intent: "team", team: other.ids.team },
    ];
    for (const fields of acts) {
      const answer = await call("/account", { form: fields, cookie });
      expect(answer.status).toBe(404);
    }
    expect(changesBetween(sessions, await snapshotTables())).toEqual([]);
    expect((await call("/teams", { cookie: session })).headers.get("location")).not.toContain("/login");
    const kept = changesBetween(before, await snapshotTables()).filter(({ table }) => table !== "sessions");
    expect(kept).toEqual([]);
  });
});
