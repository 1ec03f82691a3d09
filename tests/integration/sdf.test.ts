import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { gzipSync } from "node:zlib";
import { and, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { ensembles, frameBlocks, frames } from "~/db/schema.server";
import type { SdfFrame } from "~/lib/sdf/frame";
import { SdfReader } from "~/lib/sdf.server";
import { record, record3000, type TestAtom } from "../factories/mol";
import { makeLab, post, reference, sifted, takenIn, upload, withJobs } from "../factories/upload";
import { call } from "../setup/app";

let token: string;
let jobs: Awaited<ReturnType<typeof withJobs>>;
beforeAll(async () => {
  jobs = await withJobs();
  ({ token } = await makeLab());
});
afterAll(() => jobs.stop());

const fixture = (name: string) =>
  readFileSync(fileURLToPath(new URL(`../../fixtures/formats/${name}`, import.meta.url)));

function readBack(text: string): SdfFrame[] {
  const reader = new SdfReader({ file: "back.sdf" });
  return [...reader.push(new TextEncoder().encode(text)), ...reader.end()];
}

const exported = async (siftId: string, format: string) =>
  (await call(`/api/v1/sifts/${siftId}/export.${format}`, { token })).text();

const METHANOL: readonly TestAtom[] = [
  { symbol: "C", at: [-0.7, 0, 0.02] },
  { symbol: "O", at: [0.72, 0, 0] },
  { symbol: "H", at: [-1.08, 1.02, 0] },
  { symbol: "H", at: [-1.08, -0.51, 0.89] },
  { symbol: "H", at: [-1.08, -0.51, -0.87] },
  { symbol: "H", at: [1.04, -0.9, 0.1] },
];
const METHANOL_BONDS = [
  [1, 2, 1],
  [1, 3, 1],
  [1, 4, 1],
  [1, 5, 1],
  [2, 6, 1],
] as const;
const shifted = (by: number) =>
  METHANOL.map(({ symbol, at: [x, y, z] }) => ({ symbol, at: [x + by, y, z] as const }));
const methanol = (title: string, data = "", by = 0) =>
  record(title, { atoms: shifted(by), bonds: METHANOL_BONDS, data });

describe("an SDF with two energies in every record", () => {
  const file = { name: "tosylamide.sdf", content: reference("ensembles/tosylamide.sdf") };

  it("becomes a question for a program that names none, and columns once it is answered", async () => {
    const taken = await takenIn(token, [file], { level: "MMFF94" });
    expect(taken).toMatchObject({
      name: "tosylamide",
      formula: "C11H17NO2S",
      intake: { frames: 400, accepted: 0, held: 400, questions: [{ id: "energy-from" }] },
    });
    expect(taken.intake.questions[0]?.options.map((option) => option.id)).toEqual([
      "field:MMFF94_ENERGY_KCAL_MOL",
      "field:UFF_ENERGY_KCAL_MOL",
      "field:CONFORMER_NUMBER",
      "none",
    ]);
    const answers = [{ id: "energy-from", option: "field:MMFF94_ENERGY_KCAL_MOL" }];
    const { intake } = await (await post(token, `/ensembles/${taken.id}/answers`, { answers })).json();
    expect(intake).toMatchObject({ accepted: 400, held: 0, questions: [] });
    const now = await (await call(`/api/v1/ensembles/${taken.id}`, { token })).json();
    expect(now.levels).toMatchObject([{ name: "MMFF94", unit: "kcal/mol", count: 400 }]);
    expect(now.columns).toMatchObject([
      { name: "MMFF94", kind: "energy" },
      { name: "CONFORMER_NUMBER", kind: "property", unit: null, count: 400 },
      { name: "UFF_ENERGY_KCAL_MOL", kind: "property", unit: "kcal/mol", count: 400 },
    ]);

    // The same bytes with other answers: a conflict; read again they change the level, and its columns follow.
    const other = await upload(token, [file], { level: "UFF", energyFrom: "field:UFF_ENERGY_KCAL_MOL" });
    expect(other.status).toBe(409);
    const again = await post(token, `/ensembles/${taken.id}/reread`, {
      level: "UFF",
      energyFrom: "field:UFF_ENERGY_KCAL_MOL",
    });
    expect(again.status).toBe(200);
    expect((await again.json()).columns.map((column: { name: string }) => column.name)).toEqual([
      "UFF",
      "CONFORMER_NUMBER",
      "MMFF94_ENERGY_KCAL_MOL",
    ]);
    const missing = await post(token, `/ensembles/${taken.id}/reread`, {
      level: "X",
      energyFrom: "field:uff",
    });
    expect(missing.status).toBe(422);
    expect((await missing.json()).errors).toMatchObject([{ field: "energyFrom" }]);
  });

  it("proposes the level of the number that was chosen, and none before", async () => {
    const own = { name: "two-levels.sdf", content: `${file.content.toString()}\n` };
    const taken = await takenIn(token, [own], {});
    const proposed = (questions: typeof taken.intake.questions) =>
      questions.find(({ id }) => id === "level")?.options.filter((option) => option.proposed);
    expect(proposed(taken.intake.questions)).toEqual([]);
    const answers = [{ id: "energy-from", option: "field:UFF_ENERGY_KCAL_MOL" }];
    const { intake } = await (await post(token, `/ensembles/${taken.id}/answers`, { answers })).json();
    expect(proposed(intake.questions)).toMatchObject([{ id: "UFF", detail: "Stands in the data fields" }]);
  });

  it("keeps titles as labels, the bond table with its orders, and hands over a file that reads back", async () => {
    const packed = { name: "tosylamide.sdf.gz", content: gzipSync(file.content) };
    const taken = await takenIn(token, [packed], {
      level: "MMFF94",
      energyFrom: "field:MMFF94_ENERGY_KCAL_MOL",
    });
    const [row] = await db.select().from(ensembles).where(eq(ensembles.id, taken.id));
    expect(row?.readerVersion).toBe("sdf 1");
    expect(row?.bondTable?.origin).toBe("file");
    const counts = new Map<number, number>();
    for (const order of row?.bondTable?.orders ?? []) counts.set(order, (counts.get(order) ?? 0) + 1);
    // A sulfone has two S=O; the ring is written with aromatic or with alternating bonds.
    expect((counts.get(2) ?? 0) + (counts.get(4) ?? 0)).toBeGreaterThanOrEqual(5);

    const sift = await sifted(token, taken.id, { level: "MMFF94" });
    const kept = sift.result?.kept ?? [];
    expect(kept.length).toBeGreaterThan(20);
    const originals = readBack(file.content.toString());
    const back = readBack(await exported(sift.id, "sdf"));
    expect(back).toHaveLength(kept.length);
    for (const [at, conformer] of kept.entries()) {
      const [own, original] = [back[at], originals[conformer.frame - 1]];
      expect(own?.problem).toBeNull();
      expect(own?.positions).toEqual(original?.positions);
      expect(own?.label).toBe(original?.label);
      expect(own?.bonds).toEqual(original?.bonds);
      expect(own?.orders).toEqual(original?.orders);
      expect(own?.chiralFlag).toBe(true);
      expect(own?.fields.get("ENERGY_KCAL_MOL")).toEqual([
        String(Number(original?.fields.get("MMFF94_ENERGY_KCAL_MOL")?.[0])),
      ]);
      expect(own?.fields.get("SOURCE_FRAME")).toEqual([String(conformer.frame)]);
      expect(own?.fields.get("SOURCE_SHA256")).toEqual([taken.files[0]?.sha256]);
      expect(own?.fields.get("UFF_ENERGY_KCAL_MOL [kcal/mol]")).toHaveLength(1);
    }
    // What was handed over can be taken in: the energy is known by its tag.
    const next = await takenIn(token, [{ name: "next.sdf", content: await exported(sift.id, "sdf") }], {
      level: "MMFF94",
      energyFrom: "field:ENERGY_KCAL_MOL",
    });
    expect(next.intake).toMatchObject({ frames: kept.length, accepted: kept.length });
    expect(next.levels).toMatchObject([{ unit: "kcal/mol" }]);
  });
});

describe("rows of the acceptance table", () => {
  it("S24: takes a single MOL block", async () => {
    const taken = await takenIn(token, [{ name: "S24.mol", content: fixture("S24.mol") }]);
    expect(taken.intake).toMatchObject({ frames: 1, accepted: 1 });
    expect(taken.name).toBe("S24");
  });

  it("S24: refuses a reaction", async () => {
    const refused = await upload(token, [{ name: "r.rxn", content: fixture("S24-reaction.rxn") }]);
    expect(refused.status).toBe(422);
    expect(await refused.json()).toMatchObject({ code: "S24" });
  });

  it("S20: reads the unit in the value, and that in the tag", async () => {
    const value = methanol("a", "> <dG>\n-12.3 kcal/mol\n\n");
    const inValue = await takenIn(token, [{ name: "v.sdf", content: value }], { level: "A" });
    expect(inValue.levels).toMatchObject([{ name: "A", unit: "kcal/mol", count: 1 }]);
    const tag = methanol("b", "> <dG (kJ/mol)>\n-51.5\n\n");
    const inTag = await takenIn(token, [{ name: "t.sdf", content: tag }], { level: "A" });
    expect(inTag.levels).toMatchObject([{ name: "A", unit: "kJ/mol", count: 1 }]);
    const none = await upload(token, [{ name: "n.sdf", content: methanol("c", "> <energy>\n-12.3\n\n") }], {
      level: "A",
    });
    expect(none.status).toBe(422);
    const problem = await none.json();
    expect(problem.errors).toMatchObject([{ field: "energyUnit" }]);
    expect(problem.detail).toContain("data field");
  });

  it("S19: a record without the energy stays, and says so", async () => {
    const content = methanol("a", "> <E (kcal/mol)>\n1.5\n\n") + methanol("b", "", 0.1);
    const taken = await takenIn(token, [{ name: "s19.sdf", content }], { level: "A" });
    expect(taken.intake).toMatchObject({ accepted: 2 });
    expect(taken.levels).toMatchObject([{ count: 1, missing: 1 }]);
    // The line of a message is the record's counts line where no line of its own is at fault.
    expect(taken.intake.messages).toContainEqual(
      expect.objectContaining({ code: "E10", frame: 2, line: 24 }),
    );
  });

  it("S21: other molecules are held", async () => {
    const taken = await takenIn(token, [{ name: "S21.sdf", content: fixture("S21.sdf") }]);
    expect(taken).toMatchObject({ formula: "H2O", intake: { frames: 4, accepted: 2, held: 2 } });
  });

  it("S22: another order of atoms is mapped, remarked and exported", async () => {
    const taken = await takenIn(token, [{ name: "S22.sdf", content: fixture("S22.sdf") }]);
    expect(taken.intake).toMatchObject({ frames: 3, accepted: 3, held: 0, remarked: 1, questions: [] });
    const said = taken.intake.messages.find((message) => message.code === "S22");
    expect(said).toMatchObject({ frame: 3, line: 38, severity: "remark" });
    expect(said?.message).toContain("C1 is atom 2 of the file");
    const [row] = await db
      .select()
      .from(frames)
      .where(and(eq(frames.ensembleId, taken.id), eq(frames.number, 3)));
    expect(row).toMatchObject({ shape: 0, indexInShape: 2, state: "remarked" });
    expect(row?.mapping?.slice(0, 2)).toEqual([1, 0]);
    const [block] = await db
      .select()
      .from(frameBlocks)
      .where(and(eq(frameBlocks.ensembleId, taken.id), eq(frameBlocks.shape, 0)));
    const data = block?.data ?? Buffer.alloc(0);
    const x = (frame: number, atom: number) => data.readDoubleLE(8 * (frame * 18 + atom * 3));
    // The third record holds the coordinates of the first, the oxygen before the carbon.
    expect([x(2, 0), x(2, 1)]).toEqual([x(0, 0), x(0, 1)]);

    const sift = await sifted(token, taken.id, {
      level: null,
      rmsdTolerance: 0,
      atoms: "all",
      symmetry: false,
    });
    const back = readBack(await exported(sift.id, "sdf"));
    const atoms = back.flatMap((frame) => frame.fields.get("SOURCE_ATOMS") ?? []);
    for (const text of atoms) expect(text).toMatch(/^2 1 /);
    const json = JSON.parse(await exported(sift.id, "json"));
    const mapped = json.conformers.filter((one: { sourceAtoms?: number[] }) => one.sourceAtoms);
    expect(mapped).toHaveLength(atoms.length);
  });

  it("S23: another configuration is held", async () => {
    const taken = await takenIn(token, [{ name: "S23.sdf", content: fixture("S23.sdf") }]);
    expect(taken.intake).toMatchObject({ accepted: 2, held: 1 });
    const held = taken.intake.messages.find((message) => message.severity === "hold");
    expect(held).toMatchObject({ code: "X40", frame: 3 });
  });

  it("S05, S09: V3000, charges and radicals go through to the export", async () => {
    const atoms = ["1 O 0 0 0 0 CHG=-1", "2 H 0 0 0.9646123456789 0"];
    const content = record3000("hydroxide", atoms, ["1 1 1 2"]);
    const taken = await takenIn(token, [{ name: "oh.sdf", content }]);
    expect(taken.intake.accepted).toBe(1);
    const sift = await sifted(token, taken.id, { level: null });
    const [back] = readBack(await exported(sift.id, "sdf"));
    expect(back).toMatchObject({ label: "hydroxide", charge: -1 });
    expect(back?.positions[5]).toBe(0.9646123456789);
  });
});

describe("the bond table of the file", () => {
  it("counts before the distances, which a remark tells of", async () => {
    // The O-H bond of all records is too long to be seen, and stands in their tables.
    const stretched = shifted(0).map((atom, k) =>
      k === 5 ? { symbol: "H", at: [2.3, -0.9, 0.1] as const } : atom,
    );
    const content = ["a", "b", "c"]
      .map((title, k) =>
        record(title, {
          atoms: stretched.map(({ symbol, at: [x, y, z] }) => ({
            symbol,
            at: [x, y, z + 0.01 * k] as const,
          })),
          bonds: METHANOL_BONDS,
        }),
      )
      .join("");
    const taken = await takenIn(token, [{ name: "long.sdf", content }]);
    expect(taken.intake).toMatchObject({ accepted: 3, held: 0 });
    expect(taken.intake.messages.map((message) => message.code)).toContain("S26");
    const [row] = await db.select().from(ensembles).where(eq(ensembles.id, taken.id));
    expect((row?.bonds.length ?? 0) / 8).toBe(5);
  });

  it("does not excuse a record whose distances became another species", async () => {
    const broken = shifted(0.3).map((atom, k) =>
      k === 5 ? { symbol: "H", at: [2.8, -0.9, 0.1] as const } : atom,
    );
    const content =
      methanol("a") + methanol("b", "", 0.1) + record("c", { atoms: broken, bonds: METHANOL_BONDS });
    const taken = await takenIn(token, [{ name: "broken.sdf", content }]);
    expect(taken.intake).toMatchObject({ accepted: 2, held: 1 });
    const held = taken.intake.messages.find((message) => message.severity === "hold");
    expect(held).toMatchObject({ code: "X38", frame: 3 });
    expect(held?.message).toContain("bond table does not show it");
  });
});
