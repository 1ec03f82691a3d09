import { eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { ensembles, links, logbook, mailQueue, teams } from "~/db/schema.server";
import { NO_FILTER } from "~/lib/logbook/filter";
import { endLink } from "~/services/links/end-link.server";
import { newLinkSecret } from "~/services/links/link-secret";
import { findLinks } from "~/services/links/list-links.server";
import { exportLogbook, loadLogbook } from "~/services/logbook/load-logbook.server";
import { CONTACT, freeze, link, makeSifted, personOf } from "../factories/editions";
import { makeMember } from "../factories/people";
import { formOf, makeLab, reference, sifted, takenIn, withJobs } from "../factories/upload";
import { call, routeRows } from "../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let at: Awaited<ReturnType<typeof makeSifted>>;
let number = 0;
const actor = () => personOf(lab.analyst.id);

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab("Estuary");
  at = await makeSifted(lab);
  ({ number } = await freeze(actor(), at, { title: "For the partner", remark: "Read the second part" }));
});
afterAll(() => runner.stop());

const NAMES = [
  "distinct-set.xyz",
  "distinct-set.sdf",
  "results.csv",
  "results.json",
  "methods.txt",
  "bundle.zip",
  "conformers.zip",
];

/** Every address below a link, from app/routes.ts itself: a new one is in here without a line of anybody's. */
const PATTERNS = routeRows()
  .map(({ path }) => `/${path}`)
  .filter((path) => path.startsWith("/e/"));

const addresses = (secret: string) =>
  PATTERNS.flatMap((pattern) => {
    const path = pattern.replace(":token", secret).replace(":position", "0");
    return path.includes(":name") ? NAMES.map((name) => path.replace(":name", name)) : [path];
  });

const makeLiveLink = (more = {}) => link(actor(), { ensembleId: at.ensembleId, number }, more);
const idOf = async (prefix: string) => {
  const rows = await findLinks(lab.team.id, at.ensembleId, new Date());
  const all = await db.select({ id: links.id, prefix: links.prefix }).from(links);
  const id = all.find((row) => row.prefix === prefix && rows.some((one) => one.id === row.id))?.id;
  if (id === undefined) throw new Error("no link");
  return id;
};

describe("a link sent by letter", () => {
  it("says who shares and until when, and nothing of what it shows", async () => {
    const email = `${newId()}@partner.example`;
    const { secret } = await makeLiveLink({ email });
    const [letter] = await db.select().from(mailQueue).where(eq(mailQueue.recipient, email));
    expect(letter?.body).toContain(`/e/${secret}`);
    const told = `${letter?.subject} ${letter?.body}`;
    expect(told).not.toMatch(/ac-ala|For the partner|second part|Ask Robin|C6H12|MMFF|Estuary/);
    // Whom it went to stands nowhere but in the queue.
    const entries = await db.select().from(logbook).where(eq(logbook.type, "link-made"));
    expect(entries.at(-1)?.data).toMatchObject({ mailed: true });
    expect(JSON.stringify(entries)).not.toContain(email);
    await expect(makeLiveLink({ email: "nobody" })).rejects.toThrow("no mail address");
  });
});

describe("a live link", () => {
  it("opens the edition, its files and its coordinates, and nothing is kept on the way (D05, B08)", async () => {
    const { secret } = await makeLiveLink({ sources: true, logbook: true });
    for (const address of addresses(secret)) {
      const answer = await call(address);
      expect(answer.status, address).toBe(200);
      expect(answer.headers.get("cache-control"), address).toBe("no-store");
      expect(answer.headers.get("x-robots-tag"), address).toBe("noindex");
      await answer.arrayBuffer();
    }
    const page = await (await call(`/e/${secret}`)).text();
    expect(page).toContain("For the partner");
    expect(page).toContain("this link ends");
    expect(page.match(/<title>[^<]*<\/title>/)?.[0]).not.toContain(secret);
  });

  it("gives source files only where its maker ticked them", async () => {
    const { secret } = await makeLiveLink();
    expect((await call(`/e/${secret}/sources/0`)).status).toBe(404);
    expect((await call(`/e/${secret}/files/results.csv`)).status).toBe(200);
    const page = await (await call(`/e/${secret}`)).text();
    expect(page).toContain("Source files are not part of this link");
  });

  it("shows one edition and nothing else: later work does not appear (D04)", async () => {
    const { secret } = await makeLiveLink();
    const before = await (await call(`/e/${secret}/files/results.json`)).text();
    const other = await sifted(lab.token, at.ensembleId, { level: "MMFF94", rmsdTolerance: 0.9 });
    await freeze(actor(), { ...at, siftId: other.id });
    expect(await (await call(`/e/${secret}/files/results.json`)).text()).toBe(before);
    for (const path of [
      "files/edition-2.json",
      "files/..%2Fresults.csv",
      "files/",
      "sources/9",
      "editions/2",
    ]) {
      expect((await call(`/e/${secret}/${path}`)).status, path).toBe(404);
    }
    for (const path of [
      `/ensembles/${at.ensembleId}/editions/${number}`,
      `/files/ensembles/${at.ensembleId}/editions/${number}/positions`,
    ]) {
      expect((await call(path)).status, path).toBe(404);
    }
  });

  it("tells a guest nothing of other editions, in the logbook's part either (D04)", async () => {
    const warm = await freeze(actor(), at, { title: "At body temperature", temperature: 310 });
    const plain = await freeze(actor(), at, { title: "At room temperature" });
    const pageOf = async (n: number) => {
      const made = await link(actor(), { ensembleId: at.ensembleId, number: n }, { logbook: true });
      return (await call(`/e/${made.secret}`)).text();
    };
    for (const [own, other] of [
      [warm, plain],
      [plain, warm],
    ] as const) {
      const [title, otherTitle] = own === warm ? ["body", "room"] : ["room", "body"];
      const page = await pageOf(own.number);
      expect(page).toContain(`Froze edition ${own.number}, “At ${title} temperature”`);
      expect(page).not.toMatch(new RegExp(`Froze edition (?!${own.number},)`));
      expect(page).not.toContain(`At ${otherTitle} temperature`);
      expect(page).not.toContain(other.contentSha256.slice(0, 8));
      expect(page).not.toContain("For the partner");
    }
  });

  it("tells a guest that a second file was read in, and says what is open once", async () => {
    const lines = reference("ensembles/ac-ala-nhme.xyz").toString("utf8").trimEnd().split("\n");
    const size = Number(lines[0]) + 2;
    const part = (from: number, to: number) => `${lines.slice(from * size, to * size).join("\n")}\n`;
    const fields = { level: "MMFF94", energyUnit: "kcal/mol" };
    const { id } = await takenIn(lab.token, [{ name: "calm.xyz", content: part(0, 12) }], fields);
    const body = formOf([{ name: "rough.xyz", content: part(12, 20) }], fields);
    await call(`/api/v1/ensembles/${id}/files`, { method: "POST", token: lab.token, body });
    const sift = await sifted(lab.token, id, { level: "MMFF94" });
    const made = await freeze(actor(), { ensembleId: id, siftId: sift.id });
    const { secret } = await link(actor(), { ensembleId: id, number: made.number }, { logbook: true });
    const page = await (await call(`/e/${secret}`)).text();
    const part2 = page.slice(page.indexOf("How it came about"));
    expect(part2).toMatch(/Added batch 2: 8 frames: 8 accepted/);
    expect(part2).toContain("rough.xyz");
    const content = await (await call(`/e/${secret}/files/results.json`)).json();
    const titles = [...content.open, ...content.findings].map(({ title }: { title: string }) => title);
    expect(content.open.length).toBeGreaterThan(0);
    expect(new Set(titles).size).toBe(titles.length);
  });

  it("holds no addresses, user names or ids (C07)", async () => {
    const { secret } = await makeLiveLink({ logbook: true });
    const page = await (await call(`/e/${secret}`)).text();
    const files = await Promise.all(
      NAMES.filter((name) => !name.endsWith(".zip")).map(async (name) =>
        (await call(`/e/${secret}/files/${name}`)).text(),
      ),
    );
    const ids = [lab.analyst.id, lab.team.id, at.ensembleId, at.siftId, at.level];
    for (const text of [page, ...files]) {
      for (const id of ids) expect(text).not.toContain(id);
      expect(text).not.toMatch(/[\w.]+@lab\.example/);
      expect(text).not.toContain("A person");
      expect(text).not.toMatch(/\/(root|home|tmp|work)\//);
    }
  });

  it("counts its openings and tells the logbook, without the caller's address (D06)", async () => {
    const { secret, prefix } = await makeLiveLink({ label: "Counted" });
    for (let k = 0; k < 3; k++) await call(`/e/${secret}`);
    await call(`/e/${secret}`, { method: "HEAD" });
    await call(`/e/${secret}`, { headers: { "sec-purpose": "prefetch" } });
    await call(`/e/${secret}/files/results.csv`);
    const [row] = await db
      .select()
      .from(links)
      .where(eq(links.id, await idOf(prefix)));
    expect(row?.opened).toBe(3);
    const entries = await db.select().from(logbook).where(eq(logbook.type, "link-opened"));
    const own = entries.filter(({ data }) => (data as { label: string }).label === "Counted");
    expect(own).toHaveLength(1);
    expect(own[0]?.origin).toBeNull();
    expect(own[0]?.userId).toBeNull();
  });
});

describe("what a guest takes", () => {
  it("stands in the logbook once a day, a file and a link: who the link is for, no address (D06)", async () => {
    const { secret } = await makeLiveLink({ label: "Takes files", sources: true });
    const again = await makeLiveLink({ label: "Takes files" });
    const take = (path: string, method = "GET") => call(`/e/${secret}/${path}`, { method });
    await take("files/results.csv", "HEAD");
    await Promise.all(Array.from({ length: 5 }, () => take("files/results.csv")));
    for (const path of ["files/bundle.zip", "files/bundle.zip", "sources/0", "files/none.csv", "positions"]) {
      await (await take(path)).arrayBuffer();
    }
    await call(`/e/${again.secret}/files/results.csv`);
    const filter = { ...NO_FILTER, kind: "export" as const, who: "link" };
    const book = await loadLogbook({ actor: actor(), ensembleId: at.ensembleId, filter });
    const own = book.rows.filter(({ who }) => who === "Takes files");
    expect(own.map(({ text }) => text).reverse()).toEqual([
      `Took results.csv of edition ${number}`,
      `Took bundle.zip of edition ${number}`,
      expect.stringMatching(/^Took the source file .+\.xyz of edition/),
      `Took results.csv of edition ${number}`,
    ]);
    expect(own[0]).toMatchObject({ by: "link", from: "guest", kind: "export" });
    const csv = await exportLogbook({ actor: actor(), ensembleId: at.ensembleId, filter });
    expect(csv).toContain(`Takes files,link,guest,export`);
    expect(csv).toContain(`Took bundle.zip of edition ${number},for the first time that day`);
    const kept = await db.select().from(logbook).where(eq(logbook.type, "link-exported"));
    expect(kept.every(({ origin, userId }) => origin === null && userId === null)).toBe(true);
  });
});

describe("a link that has ended", () => {
  async function expectClosed(secret: string) {
    for (const address of addresses(secret)) {
      const answer = await call(address);
      expect(answer.status, address).toBe(404);
      const text = await answer.text();
      // Its own page says whom to ask; everything else looks like any other address.
      const page = address === `/e/${secret}`;
      expect(text.includes("This link has ended"), address).toBe(page);
      expect(text.includes(CONTACT), address).toBe(page);
      expect(text).not.toContain("For the partner");
    }
  }

  it("by hand: at once, for pages, data, pictures and exports (D03)", async () => {
    const { secret, prefix } = await makeLiveLink({ sources: true });
    expect((await call(`/e/${secret}`)).status).toBe(200);
    await endLink({ actor: actor(), linkId: await idOf(prefix) });
    await expectClosed(secret);
    expect((await findLinks(lab.team.id, at.ensembleId, new Date()))[0]?.state).toBe("ended by hand");
  });

  it("on its day (D02)", async () => {
    const { secret, prefix } = await makeLiveLink();
    await db
      .update(links)
      .set({ endsAt: new Date(Date.now() - 1000) })
      .where(eq(links.id, await idOf(prefix)));
    await expectClosed(secret);
  });

  it("with its ensemble or its team, and lives again with them", async () => {
    const { secret } = await makeLiveLink();
    await db.update(ensembles).set({ deletedAt: new Date() }).where(eq(ensembles.id, at.ensembleId));
    await expectClosed(secret);
    await db.update(ensembles).set({ deletedAt: null }).where(eq(ensembles.id, at.ensembleId));
    expect((await call(`/e/${secret}`)).status).toBe(200);
    await db.update(teams).set({ deletedAt: new Date() }).where(eq(teams.id, lab.team.id));
    await expectClosed(secret);
    await db.update(teams).set({ deletedAt: null }).where(eq(teams.id, lab.team.id));
  });
});

describe("any other secret", () => {
  it("gets the plain page, whatever it looks like", async () => {
    const words = new Set<string>();
    for (const secret of [
      newLinkSecret(),
      newId(),
      "x",
      "a".repeat(32),
      "%00",
      "ABCDEFGHIJKLMNOPQRSTUVWXYZ234567",
    ]) {
      const answer = await call(`/e/${secret}`, { address: "198.51.100.7" });
      expect(answer.status).toBe(404);
      const text = await answer.text();
      expect(text).not.toContain("has ended");
      words.add(text.match(/<h1[^>]*>([^<]*)/)?.[1] ?? "");
    }
    expect([...words]).toEqual(["Nothing here"]);
  });

  it("is counted by address range: after thirty the caller waits, holders of links do not (D06)", async () => {
    const address = "203.0.113.9";
    const { secret } = await makeLiveLink();
    const status: number[] = [];
    for (let k = 0; k < 32; k++)
      status.push((await call(`/e/${newLinkSecret()}/positions`, { address })).status);
    expect(status.slice(0, 30)).toEqual(Array.from({ length: 30 }, () => 404));
    expect(status.slice(30)).toEqual([429, 429]);
    const refused = await call(`/e/${newLinkSecret()}`, { address: "203.0.113.77" });
    expect(refused.status).toBe(429);
    expect((await call(`/e/${secret}`, { address })).status).toBe(200);
    expect((await call(`/e/${newLinkSecret()}`, { address: "203.0.114.1" })).status).toBe(404);
  });
});

describe("making and ending links", () => {
  it("keeps the checksum and four characters of the secret, which has 160 random bits (D01)", async () => {
    const { secret, prefix } = await makeLiveLink();
    expect(secret).toMatch(/^[a-z2-7]{32}$/);
    const [row] = await db
      .select()
      .from(links)
      .where(eq(links.id, await idOf(prefix)));
    expect(row?.secretSha).toHaveLength(32);
    expect(row?.prefix).toBe(secret.slice(0, 4));
    expect(JSON.stringify(row)).not.toContain(secret);
    const secrets = new Set(Array.from({ length: 500 }, newLinkSecret));
    expect(secrets.size).toBe(500);
  });

  it("lives no longer than the team allows, at least a day, and is for somebody", async () => {
    await db.update(teams).set({ linkDays: 20 }).where(eq(teams.id, lab.team.id));
    await expect(makeLiveLink({ days: 21 })).rejects.toThrow(/at most 20 days/);
    await expect(makeLiveLink({ days: 20 })).resolves.toMatchObject({ secret: expect.any(String) });
    await expect(makeLiveLink({ days: 0 })).rejects.toThrow(/one day/);
    await expect(makeLiveLink({ label: " " })).rejects.toThrow(/for whom/);
  });

  it("is for owners and analysts; readers may not, strangers find nothing", async () => {
    const { prefix } = await makeLiveLink();
    const linkId = await idOf(prefix);
    const reader = await makeMember(lab.team.id, "reader");
    const other = await makeLab();
    const make = (userId: string) => link(personOf(userId), { ensembleId: at.ensembleId, number });
    await expect(make(reader.id)).rejects.toMatchObject({ code: "forbidden" });
    await expect(make(other.analyst.id)).rejects.toMatchObject({ code: "not-found" });
    await expect(endLink({ actor: personOf(reader.id), linkId })).rejects.toMatchObject({
      code: "forbidden",
    });
    await expect(endLink({ actor: personOf(other.analyst.id), linkId })).rejects.toMatchObject({
      code: "not-found",
    });
    await expect(endLink({ actor: actor(), linkId: newId() })).rejects.toMatchObject({ code: "not-found" });
    await endLink({ actor: actor(), linkId });
    await endLink({ actor: actor(), linkId });
    const ended = await db.select().from(logbook).where(eq(logbook.type, "link-ended"));
    expect(ended.filter(({ data }) => (data as { prefix: string }).prefix === prefix)).toHaveLength(1);
  });
});
