import { createHash } from "node:crypto";
import { and, eq, sql } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db, inTransaction, pool } from "~/db/client.server";
import { driverCode } from "~/db/driver-errors.server";
import { newId } from "~/db/new-id.server";
import { columns, editionFiles, editions, ensembles, jobs, logbook, verifications } from "~/db/schema.server";
import { canonicalJson } from "~/lib/edition/canonical-json";
import { editionContentSchema } from "~/lib/edition/content";
import { keepMeasured } from "~/services/averages/keep-measured.server";
import { keepMeasuredProperties } from "~/services/averages/keep-measured-properties.server";
import { loadAverages } from "~/services/averages/load-averages.server";
import { joinAtoms, splitAtoms } from "~/services/averages/split-atoms.server";
import { lockEnsemble, storeColumn } from "~/services/columns/store-column.server";
import { askToVerify } from "~/services/editions/ask-to-verify.server";
import { lastVerification } from "~/services/editions/find-edition.server";
import { loadEdition } from "~/services/editions/load-edition.server";
import { loadHandOver } from "~/services/editions/load-hand-over.server";
import { openEditionFile } from "~/services/editions/open-edition-file.server";
import { holdFrame, releaseFrame } from "~/services/ensembles/decide-frame.server";
import { unpackMolecule } from "~/services/ensembles/molecule.server";
import { waitForJob } from "~/services/jobs/wait-for-job.server";
import { freeze, makeSifted, personOf } from "../factories/editions";
import { freezeFirst } from "../factories/first-edition";
import { makeMember, tokenOf } from "../factories/people";
import { formOf, makeLab, reference, sifted, takenIn, withJobs } from "../factories/upload";
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

/** Recomputes an edition through the queue, and how it came out. */
async function verify(made: { id: string; number: number }, ensembleId = at.ensembleId) {
  const jobId = await askToVerify({ actor: actor(), ensembleId, number: made.number });
  await waitForJob(jobId, 60_000);
  const [job] = await db.select().from(jobs).where(eq(jobs.id, jobId));
  expect(job?.state, job?.error ?? "").toBe("done");
  const last = await lastVerification(made.id);
  if (last === null) throw new Error("no verification");
  const files = last.files.filter(({ note }) => note === undefined);
  return {
    same: last.same,
    files: files.length,
    differing: files.filter(({ was, is }) => was !== is).map(({ name }) => name),
    notes: last.files.flatMap(({ name, note }) => (note === undefined ? [] : [`${name}: ${note}`])),
  };
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
      "temperatures.csv",
      "frames.csv",
      "results.json",
      "methods.txt",
      "figure-shapes.svg",
      "figure-energy-ladder.svg",
      "figure-cumulative-population.svg",
      "figure-population-ranges.svg",
      "figure-temperatures.svg",
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

  it("cannot be got at by way of its team, its ensemble, further pieces or its verifications (security G03)", async () => {
    const made = await freeze(actor(), at);
    await verify(made);
    const { teamId } = await rowOf(made.id);
    const connection = await pool().getConnection();
    const tried = async (statement: string, values: unknown[]) =>
      connection.query(statement, values).then(
        () => "done",
        (error: unknown) => driverCode(error),
      );
    try {
      // A session may switch foreign keys off and set its own clock, and no more.
      for (const checks of [1, 0]) {
        await connection.query(
          `set foreign_key_checks = ${checks}, timestamp = unix_timestamp('2037-01-01')`,
        );
        const refused = [
          await tried("update teams set id = 'aaaaaaaaaaaaaaaa' where id = ?", [teamId]),
          await tried("update teams set deleted_at = '2020-01-01' where id = ?", [teamId]),
          await tried("delete from teams where id = ?", [teamId]),
          await tried("replace into teams (id, name, created_at) values (?, 'x', now())", [teamId]),
          await tried("update ensembles set id = 'aaaaaaaaaaaaaaaa' where id = ?", [at.ensembleId]),
          await tried("delete from editions where id = ?", [made.id]),
          await tried("delete from verifications where edition_id = ?", [made.id]),
          await tried("insert into edition_files values (?, 'results.csv', 9, 'x')", [made.id]),
          await tried("insert into edition_files values (?, 'more.csv', 0, 'x')", [made.id]),
        ];
        expect(new Set(refused), `foreign_key_checks = ${checks}`).toEqual(new Set(["ER_SIGNAL_EXCEPTION"]));
      }
    } finally {
      connection.destroy();
    }
    expect((await verify(made)).same).toBe(true);
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
    expect(await verify(made)).toEqual({ same: true, files: 15, differing: [], notes: [] });
    const [row] = await db.select().from(verifications).where(eq(verifications.editionId, made.id));
    expect(row?.same).toBe(true);
    await releaseFrame({ actor: actor(), ensembleId: at.ensembleId, frame: 3, reason: "back" });
  });

  it("names a level whose numbers are others now, and recomputes from those that the edition keeps", async () => {
    const made = await freeze(actor(), at);
    const [column] = await db.select().from(columns).where(eq(columns.id, at.level));
    if (column === undefined) throw new Error("no column");
    const changed = Buffer.from(column.data);
    changed.writeDoubleLE(1234.5, 0);
    await db.update(columns).set({ data: changed }).where(eq(columns.id, at.level));
    const answer = await verify(made);
    await db.update(columns).set({ data: column.data }).where(eq(columns.id, at.level));
    expect(answer).toMatchObject({ same: true, differing: [] });
    expect(answer.notes).toEqual([
      "column MMFF94: The column holds other numbers now; those that the edition keeps were taken.",
    ]);
  });

  it("gives the same bytes of an edition that keeps what each of two searches found", async () => {
    const lines = reference("ensembles/ac-ala-nhme.xyz").toString("utf8").split("\n");
    const each = Number(lines[0]) + 2;
    const part = (from: number, to: number) => `${lines.slice(from * each, to * each).join("\n")}\n`;
    const fields = { level: "MMFF94", energyUnit: "kcal/mol" };
    const { id } = await takenIn(lab.token, [{ name: "first.xyz", content: part(0, 40) }], fields);
    const body = formOf([{ name: "second.xyz", content: part(40, 60) }], fields);
    const added = await call(`/api/v1/ensembles/${id}/files`, { method: "POST", token: lab.token, body });
    expect(added.status).toBe(201);
    const sift = await sifted(lab.token, id, { level: "MMFF94" });
    const made = await freeze(actor(), { ensembleId: id, siftId: sift.id });
    const content = JSON.parse((await rowOf(made.id)).content);
    // Which conformers each search met, counted here by the frames that the sift names.
    const met = (from: number, to: number) => {
      const { kept = [], dropped = [] } = sift.result ?? {};
      const shown = [
        ...kept.map(({ frame }) => [frame, frame]),
        ...dropped.map((one) => [one.frame, one.repeats]),
      ];
      return new Set(shown.flatMap(([frame = 0, shape]) => (frame > from && frame <= to ? [shape] : [])));
    };
    const [first, second] = [met(0, 40), met(40, 60)];
    const both = [...first].filter((shape) => second.has(shape)).length;
    expect(both).toBeGreaterThan(0);
    expect(content.searches?.each).toMatchObject([
      { name: "first.xyz", ranges: [[1, 40]], frames: 40, found: first.size },
      { name: "second.xyz", ranges: [[41, 60]], frames: 20, found: second.size },
    ]);
    const estimate = ((first.size + 1) * (second.size + 1)) / (both + 1) - 1;
    expect(content.searches?.pair).toEqual({ first: first.size, second: second.size, both, estimate });
    expect(content.words.methods).toContain("2 searches were compared by capture and recapture");
    expect(await verify(made, id)).toMatchObject({ same: true, differing: [], notes: [] });
  });

  it("is asked for once however often somebody presses", async () => {
    const made = await freeze(actor(), at);
    const ask = () => askToVerify({ actor: actor(), ensembleId: at.ensembleId, number: made.number });
    const asked = await Promise.all([ask(), ask(), ask()]);
    expect(new Set(asked).size).toBe(1);
    await waitForJob(asked[0] ?? "", 60_000);
  });

  it("says which file is not the one that was handed out", async () => {
    const made = await freeze(actor(), at);
    const row = await rowOf(made.id);
    // A frozen one cannot be changed: a copy of it with another checksum of one file.
    const id = newId();
    const files = (row.files as { name: string; sha256: string }[]).map((file) =>
      file.name === "results.csv" ? { ...file, sha256: "0".repeat(64) } : file,
    );
    await db.insert(editions).values({ ...row, id, number: 900, files });
    const kept = await db.select().from(editionFiles).where(eq(editionFiles.editionId, made.id));
    for (const file of kept) await db.insert(editionFiles).values({ ...file, editionId: id });
    const answer = await verify({ id, number: 900 });
    expect(answer.same).toBe(false);
    // Its number stands in citation and manifest, so they differ too.
    expect(answer.differing).toEqual(["results.csv", "citation.bib", "CITATION.cff", "manifest.json"]);
  });

  it("still verifies editions of the first content, which keep no ranges", async () => {
    const made = await freezeFirst(at, lab.team.id);
    expect(await verify(made)).toEqual({ same: true, files: 8, differing: [], notes: [] });
    const [column] = await db.select().from(columns).where(eq(columns.id, at.level));
    if (column === undefined) throw new Error("no column");
    await db.delete(columns).where(eq(columns.id, at.level));
    const answer = await verify(made);
    await db.insert(columns).values(column);
    expect(answer).toMatchObject({ same: true, differing: [] });
    expect(answer.notes.map((note) => note.split(":")[0])).toEqual(["column MMFF94", "sift"]);
  });
});

describe("what an ensemble holds beside populations", () => {
  it("goes into the edition as sections: averages by their rules, the comparison of levels, the search", async () => {
    const frames = Array.from({ length: 60 }, (_, k) => k + 1);
    const table = [
      "frame,dipole [D],better [kcal/mol],rank",
      ...frames.map((frame) => `${frame},${(frame % 7) / 2},${frame / 10},${frame}`),
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
    expect(content.averages).toMatchObject([
      { property: "dipole", unit: "D", rule: "linear" },
      { property: "rank", unit: null, rule: "linear" },
    ]);
    const { error, average } = content.averages[0];
    expect(error.low).toBeLessThan(average);
    expect(error.high).toBeGreaterThan(average);
    expect(content.temperatures.kelvin).toEqual([253, 298.15, 323]);
    expect(content.temperatures.averages[1][0]).toBe(average);
    expect(content.comparisons).toMatchObject([{ reference: "better" }]);
    expect(content.comparisons[0].n).toBeGreaterThan(3);
    expect(content.sampling.coverage).toBeGreaterThan(0);
    expect(content.words.methods).toContain("2 properties were averaged");
    // What only counts frames up is a property like others, here and in every other place that lists averages.
    const edition = await loadEdition({ actor: actor(), ensembleId: at.ensembleId, number: made.number });
    expect(edition.averages?.map(({ property }) => property)).toEqual(["dipole", "rank"]);
    expect(edition.counting).toEqual(["rank"]);
    expect(content.words.methods).toContain("MMFF94 was compared with better");
    const csv = (await bytesOf(made.id, "averages.csv")).toString("utf8");
    const own = await call(`/api/v1/sifts/${at.siftId}/averages.csv?sigma=0.5`, { token: lab.token });
    expect(csv).toBe(await own.text());
    // A name and a rule that are set later do not touch what was frozen.
    await db
      .update(columns)
      .set({ rule: "rms", name: "mu" })
      .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.name, "dipole")));
    expect(await verify(made)).toEqual({ same: true, files: 16, differing: [], notes: [] });
    // A column that is gone: the edition keeps its numbers.
    const gone = and(eq(columns.ensembleId, at.ensembleId), eq(columns.name, "mu"));
    await db.delete(columns).where(gone);
    const answer = await verify(made);
    expect(answer).toMatchObject({ same: true, differing: [] });
    expect(answer.notes.join()).toContain("column dipole: The column is not there any more");
  });
});

describe("what people said of averages", () => {
  it("is frozen with its figures and without names, and verifies whatever they say later", async () => {
    const [row] = await db.select().from(ensembles).where(eq(ensembles.id, at.ensembleId));
    const { offsets, neighbours, elements } = unpackMolecule(row!);
    const around = (atom: number) => [...neighbours.subarray(offsets[atom]!, offsets[atom + 1]!)];
    const hydrogensOf = (atom: number) => around(atom).filter((one) => elements[one] === 1);
    const methyl = elements.findIndex((z, atom) => z === 6 && hydrogensOf(atom).length === 3);
    const [a, b, c] = hydrogensOf(methyl).map((atom) => atom + 1) as [number, number, number];
    await inTransaction(async (tx) => {
      const where = { teamId: lab.team.id, ensembleId: at.ensembleId, userId: lab.analyst.id };
      await lockEnsemble(tx, where);
      for (const [k, atom] of [a, b, c].entries()) {
        await storeColumn(tx, where, {
          ...{ name: `shift H${atom}`, kind: "property", unit: "ppm", origin: "table:shifts.csv" },
          ...{ quantity: "shift", atom },
          data: {
            values: new Float64Array(row!.frames).fill(k + 1),
            present: new Uint8Array(row!.frames).fill(1),
          },
        });
      }
    });
    const plain = await freeze(actor(), at);
    const person = { actor: actor(), ensembleId: at.ensembleId };
    await splitAtoms({ ...person, parts: [[a], [b], [c]] });
    // H a is computed near 1 and H b near 2, frames that number them otherwise aside: entered the wrong way round.
    const record = {
      quantity: "shift",
      are: null,
      values: [
        [a, 2],
        [b, 1],
      ],
      scaling: [],
      swapped: [a],
    };
    await keepMeasured({ ...person, record: JSON.stringify(record), version: 1 });
    const made = await freeze(actor(), at);
    const text = (await rowOf(made.id)).content;
    expect(text).not.toContain(lab.analyst.id);
    const content = editionContentSchema.parse(JSON.parse(text));
    expect(content.splits).toEqual([[[a], [b], [c]]]);
    const shift = content.measured?.[0];
    const [nucleus] = shift!.nuclei;
    expect(nucleus).toMatchObject({ z: 1, agreement: { n: 2, corrected: null } });
    const computed = (atom: number) =>
      content.averages!.find(({ property }) => property === `shift H${atom}`)!.average!;
    const [one, two] = [computed(a), computed(b)];
    expect(nucleus!.agreement!.mae).toBeCloseTo((Math.abs(one - 1) + Math.abs(two - 2)) / 2, 12);
    expect(nucleus!.agreement!.rmse).toBeCloseTo(Math.hypot(one - 1, two - 2) / Math.SQRT2, 12);
    const [pair] = shift!.pairs;
    expect(pair).toMatchObject({ atoms: [a, b], z: 1, chosen: "swapped" });
    expect(pair!.entered.mae).toBeCloseTo((Math.abs(one - 2) + Math.abs(two - 1)) / 2, 12);
    expect(pair!.swapped.nucleusMae).toBeCloseTo(nucleus!.agreement!.mae, 12);
    expect(content.words.methods).toContain("slow rotor was assumed by hand");
    expect(content.words.methods).toContain("H: 2 values, mean absolute error ");
    const lines = async (name: string) => (await bytesOf(made.id, name)).toString("utf8").split("\r\n");
    const of = (all: string[], start: string) => all.find((line) => line.startsWith(start)) ?? "";
    expect(of(await lines("measured.csv"), `shift,ppm,H,H${a},`)).toMatch(/,1,[^,]*,swapped,,$/);
    expect(of(await lines("measured.csv"), `shift,ppm,H,H${c},`)).toMatch(/,,,,,$/);
    expect(of(await lines("agreement.csv"), "shift,ppm,H,all,as chosen,2,")).not.toBe("");
    const both = await lines("agreement.csv");
    expect(of(both, `shift,ppm,H,H${a} and H${b},swapped (chosen),2,`)).not.toBe("");
    expect(of(both, `shift,ppm,H,H${a} and H${b},as entered,2,`)).not.toBe("");
    await joinAtoms({ ...person, atom: b });
    const none = { ...record, values: [], swapped: [] };
    await keepMeasured({ ...person, record: JSON.stringify(none), version: 3 });
    expect(await verify(made)).toEqual({ same: true, files: 18, differing: [], notes: [] });
    expect(await verify(plain)).toMatchObject({ same: true, differing: [] });
    const [, later] = [
      await freeze(actor(), at),
      await loadHandOver({
        ...person,
        ...{ siftId: at.siftId, temperature: 298.15, weights: "auto", compare: null },
      }),
    ];
    const words = later.editions[0]?.changed.join("; ");
    expect(words).toContain(`groups taken apart by hand: none instead of H${a} | H${b} | H${c}`);
    expect(words).toContain("measured values of shift gone");
  });
});

describe("measured values of properties in an edition", () => {
  it("stand beside its averages, in its files and methods text, and are told when they change", async () => {
    const person = { actor: actor(), ensembleId: at.ensembleId };
    const name = "coupling";
    await inTransaction(async (tx) => {
      const [row] = await tx.select().from(ensembles).where(eq(ensembles.id, at.ensembleId));
      const where = { teamId: lab.team.id, ensembleId: at.ensembleId, userId: lab.analyst.id };
      await lockEnsemble(tx, where);
      await storeColumn(tx, where, {
        ...{ name, kind: "property", unit: "Hz", origin: "table:couplings.csv" },
        data: {
          values: Float64Array.from({ length: row!.frames }, (_, k) => 5 + (k % 7)),
          present: new Uint8Array(row!.frames).fill(1),
        },
      });
    });
    const { said } = await loadAverages({ ...person, siftId: at.siftId });
    const keep = (values: [string, number][], version: number) =>
      keepMeasuredProperties({ ...person, record: JSON.stringify({ values }), version });
    await keep([[name, 1.5]], said.version);
    const made = await freeze(actor(), at);
    const content = editionContentSchema.parse(JSON.parse((await rowOf(made.id)).content));
    const average = content.averages!.find(({ property }) => property === name)!.average!;
    expect(content.measuredProperties).toMatchObject({
      stated: { values: [[name, 1.5]] },
      rows: [{ property: name, average, measured: 1.5, difference: average - 1.5 }],
      units: [{ agreement: { n: 1, max: Math.abs(average - 1.5), maxAt: name, corrected: null } }],
    });
    expect(content.words.methods).toContain(
      "Averages of 1 property were compared with measured values (1 value in",
    );
    expect((await bytesOf(made.id, "measured.csv")).toString("utf8")).toContain(`,1.5,${average - 1.5},`);
    await keep([], said.version + 1);
    expect(await verify(made)).toMatchObject({ same: true, differing: [] });
    const shown = { siftId: at.siftId, temperature: 298.15, weights: "auto" as const, compare: null };
    const { next } = await loadHandOver({ ...person, ...shown });
    expect(next!.changed.join("; ")).toContain(`measured values of ${name} gone`);
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
