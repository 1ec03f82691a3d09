import { createHash } from "node:crypto";
import { and, eq, sql } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { driverCode } from "~/db/driver-errors.server";
import { columns, editionFiles, editions, ensembles, logbook, verifications } from "~/db/schema.server";
import { canonicalJson } from "~/lib/edition/canonical-json";
import { loadHandOver } from "~/services/editions/load-hand-over.server";
import { openEditionFile } from "~/services/editions/open-edition-file.server";
import { verifyEdition } from "~/services/editions/verify-edition.server";
import { holdFrame, releaseFrame } from "~/services/ensembles/decide-frame.server";
import { freeze, makeSifted, personOf } from "../factories/editions";
import { makeMember, tokenOf } from "../factories/people";
import { makeLab, sifted, withJobs } from "../factories/upload";
import { call } from "../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let at: Awaited<ReturnType<typeof makeSifted>>;
const actor = () => personOf(lab.analyst.id);

beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab("Estuary");
  at = await makeSifted(lab);
});
afterAll(() => runner.stop());

const rowOf = async (id: string) => {
  const [row] = await db.select().from(editions).where(eq(editions.id, id));
  if (row === undefined) throw new Error("no edition");
  return row;
};

async function bytesOf(editionId: string, name: string): Promise<Buffer> {
  const file = await openEditionFile({ teamId: lab.team.id, editionId }, name, "x");
  const chunks: Uint8Array[] = [];
  for await (const chunk of file.chunks) chunks.push(chunk);
  return Buffer.concat(chunks);
}

describe("freezing", () => {
  it("keeps content, recipe, inputs and files under their checksums", async () => {
    const made = await freeze(actor(), at, { title: "First look", remark: "For the meeting" });
    const row = await rowOf(made.id);
    const sha = createHash("sha256").update(row.content, "utf8").digest("hex");
    expect(sha).toBe(made.contentSha256);
    expect(row.contentSha?.toString("hex")).toBe(sha);
    expect(canonicalJson(JSON.parse(row.content))).toBe(row.content);
    const files = row.files as { name: string; bytes: number; sha256: string }[];
    expect(files.map(({ name }) => name)).toEqual([
      "distinct-set.xyz",
      "distinct-set.sdf",
      "results.csv",
      "results.json",
      "methods.txt",
      "citation.bib",
      "CITATION.cff",
      "manifest.json",
    ]);
    for (const file of files) {
      const bytes = await bytesOf(made.id, file.name);
      expect(bytes.length, file.name).toBe(file.bytes);
      expect(createHash("sha256").update(bytes).digest("hex"), file.name).toBe(file.sha256);
    }
    const content = JSON.parse(row.content);
    expect(content.kept.length).toBeGreaterThan(3);
    const sum = content.populations.values.reduce(
      (all: number, one: { population: number }) => all + one.population,
      0,
    );
    expect(sum).toBeCloseTo(1, 12);
    // Nothing that a guest may not read.
    for (const id of [at.ensembleId, at.siftId, at.level, lab.analyst.id, lab.team.id]) {
      expect(row.content).not.toContain(id);
    }
  });

  it("gives files that read back: structures of the distinct set, manifest with every other file", async () => {
    const made = await freeze(actor(), at);
    const content = JSON.parse((await rowOf(made.id)).content);
    const xyz = (await bytesOf(made.id, "distinct-set.xyz")).toString("utf8").split("\n");
    expect(xyz.length).toBe(content.kept.length * (content.ensemble.atoms + 2) + 1);
    const manifest = JSON.parse((await bytesOf(made.id, "manifest.json")).toString("utf8"));
    expect(manifest.edition).toMatchObject({
      number: made.number,
      contentSha256: made.contentSha256,
      team: "Estuary",
    });
    for (const file of manifest.files) {
      const sha = createHash("sha256")
        .update(await bytesOf(made.id, file.name))
        .digest("hex");
      expect(sha, file.name).toBe(file.sha256);
    }
    expect(manifest.inputs.columns[0].sha256).toMatch(/^[0-9a-f]{64}$/);
  });

  it("numbers editions that are frozen at once one by one", async () => {
    const before = await db
      .select({ n: editions.number })
      .from(editions)
      .where(eq(editions.ensembleId, at.ensembleId));
    const made = await Promise.all(Array.from({ length: 4 }, () => freeze(actor(), at)));
    const numbers = made.map(({ number }) => number).sort((a, b) => a - b);
    expect(numbers).toEqual([1, 2, 3, 4].map((k) => k + before.length));
    expect(new Set(made.map(({ contentSha256 }) => contentSha256)).size).toBe(1);
  });

  it("cannot be changed or removed, not even by the application's own user of the database (security G03)", async () => {
    const made = await freeze(actor(), at);
    const tries = [
      db.update(editions).set({ title: "another" }).where(eq(editions.id, made.id)),
      db.delete(editions).where(eq(editions.id, made.id)),
      db
        .update(editionFiles)
        .set({ data: Buffer.from("x") })
        .where(eq(editionFiles.editionId, made.id)),
      db.delete(editionFiles).where(eq(editionFiles.editionId, made.id)),
    ];
    for (const attempt of tries) {
      const code = await attempt.then(
        () => "done",
        (error: unknown) => driverCode(error),
      );
      expect(code).toBe("ER_SIGNAL_EXCEPTION");
    }
  });

  it("is refused while the distinct set is out of date, and for readers and tokens", async () => {
    const other = await makeSifted(lab, "held.xyz").catch(() => null);
    const target = other ?? at;
    await holdFrame({ actor: actor(), ensembleId: target.ensembleId, frame: 2, reason: "looks odd" });
    await expect(freeze(actor(), target)).rejects.toThrow(/changed after this sift/);
    await releaseFrame({ actor: actor(), ensembleId: target.ensembleId, frame: 2, reason: "it is fine" });
    const reader = await makeMember(lab.team.id, "reader");
    await expect(freeze(personOf(reader.id), target)).rejects.toMatchObject({ code: "forbidden" });
    const { findToken } = await import("~/services/auth/find-token.server");
    const token = await findToken(await tokenOf(lab.analyst.id, lab.team.id));
    if (token === null) throw new Error("no token");
    await expect(freeze(token, target)).rejects.toMatchObject({ code: "forbidden" });
  });

  it("stands in the logbook", async () => {
    const made = await freeze(actor(), at, { title: "Noted" });
    const rows = await db
      .select({ data: logbook.data })
      .from(logbook)
      .where(and(eq(logbook.ensembleId, at.ensembleId), eq(logbook.type, "edition-frozen")));
    expect(rows.map(({ data }) => data)).toContainEqual(
      expect.objectContaining({ number: made.number, title: "Noted", sha256: made.contentSha256 }),
    );
  });
});

describe("recompute and verify", () => {
  it("gives the same bytes, also after frames were held and another name was given", async () => {
    const made = await freeze(actor(), at, { title: "To verify" });
    await holdFrame({ actor: actor(), ensembleId: at.ensembleId, frame: 3, reason: "later decision" });
    await db.update(ensembles).set({ name: "Another name" }).where(eq(ensembles.id, at.ensembleId));
    const answer = await verifyEdition({ actor: actor(), ensembleId: at.ensembleId, number: made.number });
    expect(answer.files.filter(({ was, is }) => was !== is)).toEqual([]);
    expect(answer.same).toBe(true);
    expect(answer.files).toHaveLength(8);
    const [row] = await db.select().from(verifications).where(eq(verifications.editionId, made.id));
    expect(row?.same).toBe(true);
    await releaseFrame({ actor: actor(), ensembleId: at.ensembleId, frame: 3, reason: "back" });
  });

  it("names the input that is another, and says that nothing could be made from it", async () => {
    const made = await freeze(actor(), at);
    const [column] = await db.select().from(columns).where(eq(columns.id, at.level));
    if (column === undefined) throw new Error("no column");
    const changed = Buffer.from(column.data);
    changed.writeDoubleLE(1234.5, 0);
    await db.update(columns).set({ data: changed }).where(eq(columns.id, at.level));
    const answer = await verifyEdition({ actor: actor(), ensembleId: at.ensembleId, number: made.number });
    await db.update(columns).set({ data: column.data }).where(eq(columns.id, at.level));
    expect(answer.same).toBe(false);
    const named = answer.files.filter(({ was, is }) => was !== is && is !== null);
    expect(named.map(({ name }) => name)).toEqual(["column MMFF94"]);
    expect(answer.files.filter(({ is }) => is === null)).toHaveLength(8);
  });
});

describe("what an ensemble holds beside populations", () => {
  it("goes into the edition as sections: averages by their rules, the comparison of levels, the search", async () => {
    const frames = Array.from({ length: 60 }, (_, k) => k + 1);
    const table = [
      "frame,dipole [D],better [kcal/mol]",
      ...frames.map((frame) => `${frame},${(frame % 7) / 2},${frame / 10}`),
    ].join("\n");
    const form = new FormData();
    form.append("file", new Blob([table]), "table.csv");
    const sent = await call(`/api/v1/ensembles/${at.ensembleId}/columns`, {
      method: "POST",
      token: lab.token,
      body: form,
    });
    expect(sent.status, await sent.clone().text()).toBe(201);
    const made = await freeze(actor(), at);
    const content = JSON.parse((await rowOf(made.id)).content);
    expect(content.averages).toMatchObject([{ property: "dipole", unit: "D", rule: "linear" }]);
    expect(content.comparisons).toMatchObject([{ reference: "better" }]);
    expect(content.comparisons[0].n).toBeGreaterThan(3);
    expect(content.sampling.coverage).toBeGreaterThan(0);
    expect(content.words.methods).toContain("1 property was averaged");
    expect(content.words.methods).toContain("MMFF94 was compared with better");
    const csv = (await bytesOf(made.id, "averages.csv")).toString("utf8");
    const own = await call(`/api/v1/sifts/${at.siftId}/averages.csv`, { token: lab.token });
    expect(csv).toBe(await own.text());
    // A name and a rule that are set later do not touch what was frozen.
    await db
      .update(columns)
      .set({ rule: "rms", name: "mu" })
      .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.name, "dipole")));
    const answer = await verifyEdition({ actor: actor(), ensembleId: at.ensembleId, number: made.number });
    expect(answer.files.filter(({ was, is }) => was !== is)).toEqual([]);
    expect(answer.files).toHaveLength(9);
  });
});

describe("the hand-over of an ensemble", () => {
  it("says what changed from one edition to the next, in words and numbers", async () => {
    const first = await freeze(actor(), at);
    const wider = await sifted(lab.token, at.ensembleId, {
      level: "MMFF94",
      rmsdTolerance: 0.6,
      energyTolerance: null,
    });
    const second = await freeze(actor(), { ...at, siftId: wider.id }, { temperature: 310 });
    const view = await loadHandOver({
      actor: actor(),
      ensembleId: at.ensembleId,
      siftId: wider.id,
      temperature: 310,
      weights: "auto",
      compare: [second.number, first.number],
    });
    expect(view.editions[0]?.number).toBe(second.number);
    const words = view.editions[0]?.changed.join("; ") ?? "";
    expect(words).toContain("RMSD tolerance: 0.600 Å instead of 0.200 Å".replaceAll(" Å", "\u00a0Å"));
    expect(words).toContain("temperature");
    expect(view.comparison?.result.changes.map(({ what }) => what)).toContain("conformers");
    const notes = view.comparison?.result.conformers.map(({ note }) => note) ?? [];
    expect(notes.some((note) => note?.startsWith("now a repeat of c"))).toBe(true);
    expect(view.next).toMatchObject({ number: second.number + 1, changed: ["nothing changed"] });
  });

  it("shows guests of an example nothing of it", async () => {
    await db.update(ensembles).set({ example: true }).where(eq(ensembles.id, at.ensembleId));
    const view = await loadHandOver({
      actor: { kind: "anonymous" },
      ensembleId: at.ensembleId,
      siftId: at.siftId,
      temperature: 298.15,
      weights: "auto",
      compare: null,
    });
    expect(view).toMatchObject({ editions: [], links: [], next: null, mayShare: false });
    await db.update(ensembles).set({ example: false }).where(eq(ensembles.id, at.ensembleId));
    expect(await db.select({ n: sql`1` }).from(editions).limit(1)).toHaveLength(1);
  });
});
