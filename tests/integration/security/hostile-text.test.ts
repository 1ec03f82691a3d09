import { desc, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { mailQueue } from "~/db/schema.server";
import { settleBackground } from "~/services/background.server";
import { letterHtml } from "~/services/mail/transport.server";
import { freeze, link, personOf } from "../../factories/editions";
import { makeMember } from "../../factories/people";
import {
  BUTANE,
  formOf,
  frame,
  makeLab,
  post,
  sifted,
  takenIn,
  upload,
  withJobs,
} from "../../factories/upload";
import { call, routeRows, type TableRow } from "../../setup/app";

// Markup, addresses that run, templates and escapes of terminals, in every text that a file or a person can bring.
const SCRIPT = "<script>alert(666)</script>";
const IMAGE = `"><img src=x onerror=alert(666)>`;
const RUNS = "javascript:alert(666)";
const TEMPLATE = "{{constructor}}$" + "{7*191}";
const ESCAPE = "\u001b[31mred";
/** Turns what follows from right to left. */
const TURN = "\u202e";
const ALL = [SCRIPT, IMAGE, RUNS, TEMPLATE].join(" ");

/** What a browser or a terminal would act upon. */
const ACTS = [
  /<script>alert\(666\)/i,
  /<img src=x/i,
  /(?:href|src|action|formaction|xlink:href)\s*=\s*["']?\s*javascript:/i,
  // biome-ignore lint/suspicious/noControlCharactersInRegex: these are what is looked for
  /[\u0000-\u0008\u000b\u000c\u000e-\u001f\u009b]/,
  /[\u202a-\u202e\u2066-\u2069]/,
  /1337/, // the template, worked out
];
/** Whatever a browser loads by itself from an address with a host. */
const ELSEWHERE =
  /<(?:script|link|img|source|iframe|object|embed|use|image)\b[^>]*\s(?:src|srcset|href|data)="?\s*(?:https?:)?\/\/|url\(["']?(?:https?:)?\/\//i;
const found = (text: string) => ACTS.filter((act) => act.test(text)).map(String);

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
const ids = { team: "", ensemble: "", sift: "", secret: "", number: "1" };
let owner: { id: string; cookie: string; email: string };

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab(`Team ${IMAGE}`);
  owner = await makeMember(lab.team.id, "owner");
  const bent = BUTANE.map((line, k) => (k === 3 ? "C 1.9480 0.1280 0.0600" : line));
  const broken = frame(`${SCRIPT} energy=-1`, ["O 0 0 0", `H${IMAGE} 0.96 0 0`, "H -0.24 0.93 0"]);
  const content =
    frame(`name="${SCRIPT}" energy=-1.5 ${RUNS} note='${IMAGE}' ${ESCAPE} <b>=1`) +
    frame(`name=${RUNS}${TURN} energy=-1.25 note='${TEMPLATE}' <b>=2`, bent) +
    broken;
  const taken = await takenIn(lab.token, [{ name: `${IMAGE}.xyz`, content }], {
    ...{ level: `L ${SCRIPT}`, energyUnit: "kcal/mol", energyFrom: "key:energy" },
    ...{ name: `E ${ALL}${TURN}`, series: `S ${ALL}${TURN}` },
  });
  const table = `frame,"P ${SCRIPT} [kcal/mol]","${TEMPLATE} ${RUNS} [D]"\n1,-2.5,0.1\n2,-2.0,0.2\n`;
  const added = await call(`/api/v1/ensembles/${taken.id}/columns`, {
    ...{ method: "POST", token: lab.token, body: formOf([{ name: `${SCRIPT}.csv`, content: table }]) },
  });
  expect(added.status, await added.clone().text()).toBe(201);
  const sift = await sifted(lab.token, taken.id, { level: taken.levels[0]?.name, energyTolerance: null });
  const pose = formOf([{ name: `${IMAGE}.xyz`, content: frame(ALL) }], { name: ALL, level: "none" });
  await call(`/ensembles/${taken.id}/compare`, { method: "POST", cookie: owner.cookie, body: pose });
  const act = (path: string, form: Record<string, string>) => call(path, { form, cookie: owner.cookie });
  await act(`/ensembles/${taken.id}/logbook`, { text: ALL });
  await act(`/ensembles/${taken.id}/intake`, { intent: "hold", frame: "2", reason: ALL });
  await act(`/ensembles/${taken.id}/intake`, { intent: "release", frame: "2", reason: ALL });
  await act(`/teams/${lab.team.id}/tokens`, { name: ALL, scope: "read", days: "1" });
  await act(`/teams/${lab.team.id}`, {
    intent: "rename",
    ensemble: taken.id,
    name: `E ${ALL}${TURN}${TURN}`,
  });
  await act("/account", { intent: "name", name: `N ${IMAGE}` });
  await act(`/teams/${lab.team.id}/people`, { intent: "invite", email: "guest@lab.example", role: "reader" });
  const at = { ensembleId: taken.id, siftId: sift.id };
  const { number } = await freeze(personOf(owner.id), at, { title: `T ${SCRIPT}`, remark: ALL });
  const made = await link(
    personOf(owner.id),
    { ensembleId: taken.id, number },
    { label: IMAGE, logbook: true, sources: true },
  );
  Object.assign(ids, { team: lab.team.id, ensemble: taken.id, sift: sift.id, secret: made.secret });
}, 120_000);
afterAll(() => runner.stop());

const rows = routeRows();
const byId = new Map(rows.map((row) => [row.id, row]));
function patternOf(row: TableRow): string {
  const parent = row.parentId === undefined ? undefined : byId.get(row.parentId);
  return `${parent ? patternOf(parent) : ""}${row.path ? `/${row.path}` : ""}`;
}
// The bare address of an ensemble only leads to its first section.
const PAGES = [...new Set(rows.filter(({ file }) => file.endsWith(".tsx")).map(patternOf))].filter(
  (pattern) => /:(team|id|token)\b/.test(pattern) && pattern !== "/ensembles/:id",
);

describe("hostile text out of files and forms (B05), and what steers a screen (row G13)", () => {
  it.each(PAGES)("is text on %s", async (pattern) => {
    const path = pattern
      .replace(":team", ids.team)
      .replace(":id", ids.ensemble)
      .replace(":token", ids.secret)
      .replace(":number", ids.number);
    const answer = await call(path, { cookie: owner.cookie });
    const page = await answer.text();
    expect(answer.status).toBe(200);
    expect(found(page)).toEqual([]);
    expect(page.match(ELSEWHERE), "loads something of another host (B06)").toBeNull();
    // Not an empty look: the text is there, as text.
    expect(page).toMatch(/alert\(666\)|L &lt;script|E &lt;script|Team /);
  });

  it.each(["methods.txt", "results.csv", "results.json", "distinct-set.xyz", "distinct-set.sdf"])(
    "is text in %s, sent as a file and with no type that a browser draws",
    async (name) => {
      const answer = await call(`/e/${ids.secret}/files/${name}`);
      expect(answer.status).toBe(200);
      expect(answer.headers.get("content-disposition")).toMatch(/^attachment/);
      expect(answer.headers.get("content-type")).not.toMatch(/html|svg|xml/);
      expect(answer.headers.get("x-content-type-options")).toBe("nosniff");
      // biome-ignore lint/suspicious/noControlCharactersInRegex: these are what is looked for
      expect(await answer.text()).not.toMatch(/[\u0000-\u0008\u000b\u000c\u000e-\u001f]/);
    },
  );

  it("is text in figures, which hold no script, link or foreign content (security E09)", async () => {
    const manifest = await (await call(`/e/${ids.secret}/files/manifest.json`)).text();
    const figures = [...new Set(manifest.match(/figure-[\w-]+\.svg/g) ?? [])];
    expect(figures.length).toBeGreaterThan(1);
    for (const name of figures) {
      const answer = await call(`/e/${ids.secret}/files/${name}`);
      expect([answer.status, answer.headers.get("content-disposition")?.slice(0, 10)]).toEqual([
        200,
        "attachment",
      ]);
      const svg = await answer.text();
      expect(svg).toMatch(/^<svg\b|^<\?xml/);
      expect(found(svg), name).toEqual([]);
      // Text has no angle brackets of its own, so these are the elements with their attributes.
      const elements = (svg.match(/<[^>]*>/g) ?? [])
        .join("\n")
        .replaceAll(' xmlns="http://www.w3.org/2000/svg"', "");
      expect(elements, name).not.toMatch(
        /<(?:script|a|foreignObject|image|use|iframe|style|animate|set)\b|\son\w+=|href|https?:/i,
      );
    }
  });

  it("is text in mail, HTML part included, and names no compound there", async () => {
    await settleBackground();
    const letters = await db
      .select({ subject: mailQueue.subject, body: mailQueue.body, html: mailQueue.html })
      .from(mailQueue)
      .where(eq(mailQueue.recipient, "guest@lab.example"))
      .orderBy(desc(mailQueue.createdAt));
    expect(letters.length).toBeGreaterThan(0);
    for (const { subject, html, body } of letters) {
      // A subject is no markup anywhere; the HTML part is.
      const drawn = html ?? letterHtml(body);
      expect(found(drawn)).toEqual([]);
      expect(drawn).toContain("img src=x onerror");
      expect(`${subject} ${body}`).not.toContain("L <script>");
      expect(subject).not.toMatch(/[\r\n]/);
    }
  });

  it("is text in refusals: problem documents are JSON, never pages", async () => {
    const refused = [
      await upload(lab.token, [{ name: `${IMAGE}.xyz`, content: `${SCRIPT}\n` }], { level: ALL }),
      await upload(lab.token, [{ name: "a.xyz", content: frame("energy=-1") }], { energyUnit: ALL }),
      await post(lab.token, `/ensembles/${ids.ensemble}/sifts`, { level: ALL }),
      await call(`/api/v1/ensembles/${encodeURIComponent(SCRIPT)}`, { token: lab.token }),
    ];
    for (const answer of refused) {
      expect(answer.status).toBeGreaterThanOrEqual(400);
      expect(answer.headers.get("content-type")).toContain("application/problem+json");
      expect(answer.headers.get("x-content-type-options")).toBe("nosniff");
    }
    const page = await call(`/${encodeURIComponent(SCRIPT)}`);
    expect(found(await page.text())).toEqual([]);
  });
});
