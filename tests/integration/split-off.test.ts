import { gzipSync } from "node:zlib";
import { and, eq } from "drizzle-orm";
import { beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { ensembles, logbook } from "~/db/schema.server";
import { symbolOf } from "~/lib/chem/elements";
import type { Actor } from "~/services/auth/access.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { loadIntake } from "~/services/ensembles/load-intake.server";
import { loadSource } from "~/services/ensembles/load-source.server";
import { splitOff } from "~/services/ensembles/split-off.server";
import { mulberry } from "../factories/embed";
import { record } from "../factories/mol";
import { mirrored, molecule } from "../factories/molecule";
import { makeMember } from "../factories/people";
import { BUTANE, frame, makeLab, takenIn } from "../factories/upload";
import { zipOf } from "../factories/zip";

let lab: Awaited<ReturnType<typeof makeLab>>;
let actor: Actor;
beforeAll(async () => {
  lab = await makeLab();
  actor = { kind: "user", userId: lab.analyst.id, sessionId: "s" };
});

const WATER = ["O 0.0000 0.0000 0.1173", "H 0.0000 0.7572 -0.4692", "H 0.0000 -0.7572 -0.4692"];
/** The end methyl 3 Å away: another species of the same atoms. */
const BROKEN = BUTANE.map((line, k) => {
  const [symbol, x, y, z] = line.split(" ");
  return [3, 11, 12, 13].includes(k) ? `${symbol} ${(Number(x) + 3).toFixed(4)} ${y} ${z}` : line;
});

const fields = { level: "A method", energyUnit: "kcal/mol", series: "Chains" };

function mixture(tag: string): string {
  return [
    frame(`${tag}_1 energy=-1.5`),
    frame(`${tag}_2 energy=-76.1`, WATER),
    frame(`${tag}_3 energy=-1.4`),
    frame(`${tag}_4 energy=-0.2`, BROKEN),
    frame(`${tag}_5 energy=-76.3`, WATER),
    frame(`${tag}_6 energy=-1.3`),
  ].join("");
}

async function bytesOf(ensembleId: string, position = 0): Promise<string> {
  const { chunks } = await loadSource({ actor, ensembleId, position });
  const all: Uint8Array[] = [];
  for await (const chunk of chunks) all.push(chunk);
  return Buffer.concat(all).toString();
}

const entries = (ensembleId: string, type: string) =>
  db
    .select({ data: logbook.data })
    .from(logbook)
    .where(and(eq(logbook.ensembleId, ensembleId), eq(logbook.type, type)));

describe("which of two molecules is the ensemble", () => {
  it("is answered once the other one became an ensemble of its own", async () => {
    const content = frame("two energy=-1.5") + frame("energy=-1.4") + frame("energy=-76.1", WATER);
    const parent = await takenIn(lab.token, [{ name: "two.xyz", content }], fields);
    expect(parent.intake.questions).toMatchObject([{ id: "group" }]);
    await splitOff({ actor, ensembleId: parent.id, frame: 3 });
    const { intake } = await describeEnsemble(lab.team.id, parent.id);
    expect(intake).toMatchObject({ accepted: 2, held: 1, questions: [] });
    expect(await entries(parent.id, "answer")).toMatchObject([{ data: { question: "group" } }]);
  });
});

describe("which of two configurations is the ensemble", () => {
  it("is answered once the other one became an ensemble of its own", async () => {
    const haloform = (sign: 1 | -1, by: number) =>
      record(`h${by}`, {
        atoms: [
          { symbol: "C", at: [by, 0, 0] },
          { symbol: "H", at: [by, 0, 1.09] },
          { symbol: "F", at: [by + 1.27, 0, -0.42] },
          { symbol: "Cl", at: [by - 0.83, 1.44 * sign, -0.55] },
          { symbol: "Br", at: [by - 0.91, -1.58 * sign, -0.62] },
        ],
        bonds: [2, 3, 4, 5].map((k) => [1, k, 1] as const),
      });
    const content = haloform(1, 1) + haloform(1, 2) + haloform(-1, 3);
    const parent = await takenIn(lab.token, [{ name: "hands.sdf", content }]);
    expect(parent.intake.questions).toMatchObject([{ id: "configuration" }]);
    const made = await splitOff({ actor, ensembleId: parent.id, frame: 3 });
    expect((await describeEnsemble(lab.team.id, made.ensembleId)).intake).toMatchObject({
      accepted: 1,
      held: 0,
    });
    const { intake } = await describeEnsemble(lab.team.id, parent.id);
    expect(intake).toMatchObject({ accepted: 2, held: 1, questions: [] });
    expect(await entries(parent.id, "answer")).toMatchObject([{ data: { question: "configuration" } }]);
  });
});

describe("held frames of one configuration whose equal atoms are exchanged", () => {
  it("become one ensemble of all of them, in XYZ too", async () => {
    const [rr, meso] = [molecule("F[C@H](Cl)[C@H](F)Cl"), molecule("F[C@H](Cl)[C@@H](F)Cl")];
    const turned = { ...meso, positions: mirrored(meso.positions) };
    const all = [rr, rr, rr, rr, rr, rr, rr, meso, meso, meso, turned, turned, turned];
    const content = all
      .map(({ graph, positions }, k) => {
        const random = mulberry(k + 1);
        const place = Array.from(positions, (x) => (x + 0.01 * (random() - 0.5)).toFixed(5));
        const lines = [...graph.elements].map(
          (z, a) => `${symbolOf(z)} ${place.slice(3 * a, 3 * a + 3).join(" ")}`,
        );
        return frame(`energy=-1.${k}`, lines);
      })
      .join("");
    const parent = await takenIn(lab.token, [{ name: "meso.xyz", content }], fields);
    expect(parent.intake).toMatchObject({ accepted: 7, held: 6 });
    const made = await splitOff({ actor, ensembleId: parent.id, frame: 8 });
    expect(made).toMatchObject({ created: true, frames: 6 });
    const child = await describeEnsemble(lab.team.id, made.ensembleId);
    expect(child.intake).toMatchObject({ frames: 6, accepted: 6, held: 0 });
    expect((await loadIntake({ actor, ensembleId: parent.id })).became).toMatchObject([
      { frames: [8, 9, 10, 11, 12, 13] },
    ]);
  });
});

describe("held frames of something else", () => {
  it("become an ensemble with their bytes, their energies and their series; both logbooks say so", async () => {
    const parent = await takenIn(lab.token, [{ name: "mix.xyz", content: mixture("own") }], {
      ...fields,
      name: "Butane",
    });
    expect(parent.intake).toMatchObject({ accepted: 3, held: 3 });
    const made = await splitOff({ actor, ensembleId: parent.id, frame: 5 });
    expect(made).toMatchObject({ created: true, frames: 2 });
    expect(made.name).toMatch(/^Butane, /);
    const child = await describeEnsemble(lab.team.id, made.ensembleId);
    expect(child).toMatchObject({
      name: made.name,
      formula: "H2O",
      series: { name: "Chains" },
      intake: { frames: 2, accepted: 2, held: 0, questions: [] },
      levels: [{ name: "A method", unit: "kcal/mol", count: 2 }],
    });
    expect(await bytesOf(made.ensembleId)).toBe(
      frame("own_2 energy=-76.1", WATER) + frame("own_5 energy=-76.3", WATER),
    );
    const there = { ensembleId: made.ensembleId, name: made.name, frames: [2, 5], count: 2 };
    expect(await entries(parent.id, "split-off")).toEqual([{ data: there }]);
    expect(await entries(made.ensembleId, "split-from")).toEqual([
      { data: { ...there, ensembleId: parent.id, name: "Butane" } },
    ]);
    expect(made.name).toBe("Butane, H2O");
    const { became } = await loadIntake({ actor, ensembleId: parent.id });
    expect(became).toEqual([{ ensembleId: made.ensembleId, name: made.name, frames: [2, 5] }]);
    // How its energies are read is known there without a question ever asked.
    expect((await loadIntake({ actor, ensembleId: made.ensembleId })).inForce).toMatchObject([
      { level: "A method", from: "key:energy", unit: "kcal/mol", kind: "electronic" },
    ]);
    // In the parent they stay held.
    expect(await describeEnsemble(lab.team.id, parent.id)).toMatchObject({
      intake: { accepted: 3, held: 3 },
    });
  });

  it("make the same ensemble again, by whichever of them it is asked", async () => {
    const content = gzipSync(mixture("again"));
    const parent = await takenIn(lab.token, [{ name: "mix.xyz.gz", content }], fields);
    const first = await splitOff({ actor, ensembleId: parent.id, frame: 2 });
    const second = await splitOff({ actor, ensembleId: parent.id, frame: 5 });
    expect(second).toEqual({ ...first, created: false });
    expect(await entries(parent.id, "split-off")).toHaveLength(1);
    await db.update(ensembles).set({ deletedAt: new Date() }).where(eq(ensembles.id, first.ensembleId));
    expect((await loadIntake({ actor, ensembleId: parent.id })).became).toEqual([]);
  });

  it("of one species are taken apart from those of another", async () => {
    const parent = await takenIn(lab.token, [{ name: "mix.xyz", content: mixture("kinds") }], fields);
    const made = await splitOff({ actor, ensembleId: parent.id, frame: 4 });
    expect(made.frames).toBe(1);
    expect(await bytesOf(made.ensembleId)).toBe(frame("kinds_4 energy=-0.2", BROKEN));
  });

  it("are cut out of the entries of a zip archive, each under the name of its entry", async () => {
    const content = zipOf([
      { name: "night/first.xyz", content: mixture("zip") },
      { name: "night/plain.xyz", content: frame("plain energy=-1.2"), store: true },
      { name: "second.xyz", content: mixture("more"), store: true },
    ]);
    const parent = await takenIn(lab.token, [{ name: "runs.zip", content }], fields);
    expect(parent.intake).toMatchObject({ frames: 13, accepted: 7, held: 6 });
    const made = await splitOff({ actor, ensembleId: parent.id, frame: 2 });
    expect(made).toMatchObject({ created: true, frames: 4 });
    const child = await describeEnsemble(lab.team.id, made.ensembleId);
    expect(child).toMatchObject({ formula: "H2O", intake: { frames: 4, accepted: 4, held: 0 } });
    expect(child.files.map(({ name, frames }) => [name, frames])).toEqual([
      ["first, H2O.xyz", 2],
      ["second, H2O.xyz", 2],
    ]);
    expect(await bytesOf(made.ensembleId, 0)).toBe(
      frame("zip_2 energy=-76.1", WATER) + frame("zip_5 energy=-76.3", WATER),
    );
    expect(await bytesOf(made.ensembleId, 1)).toBe(
      frame("more_2 energy=-76.1", WATER) + frame("more_5 energy=-76.3", WATER),
    );
    // The same frames, asked for by one of the other entry, make no second ensemble.
    const again = await splitOff({ actor, ensembleId: parent.id, frame: 12 });
    expect(again).toEqual({ ...made, created: false });
  });

  it("come out of an SDF in a zip archive as records", async () => {
    const peroxide = [
      { symbol: "O", at: [0, 0.73, -0.05] },
      { symbol: "O", at: [0, -0.73, -0.05] },
      { symbol: "H", at: [0.8, 0.9, 0.43] },
      { symbol: "H", at: [-0.8, -0.9, 0.43] },
    ] as const;
    const own = record("own");
    const other = record("other", {
      atoms: peroxide,
      bonds: [
        [1, 2, 1],
        [1, 3, 1],
        [2, 4, 1],
      ],
    });
    const content = zipOf([{ name: "set.sdf", content: own + other + own }]);
    const parent = await takenIn(lab.token, [{ name: "set.zip", content }], {});
    expect(parent.intake).toMatchObject({ accepted: 2, held: 1 });
    const made = await splitOff({ actor, ensembleId: parent.id, frame: 2 });
    expect(await bytesOf(made.ensembleId)).toBe(other);
  });

  it("are refused where they are accepted, unknown, or asked for by a reader or a stranger", async () => {
    const parent = await takenIn(lab.token, [{ name: "mix.xyz", content: mixture("no") }], fields);
    const ask = (who: Actor, number: number) =>
      splitOff({ actor: who, ensembleId: parent.id, frame: number });
    await expect(ask(actor, 1)).rejects.toMatchObject({ code: "conflict" });
    await expect(ask(actor, 99)).rejects.toMatchObject({ code: "not-found" });
    const reader = await makeMember(lab.team.id, "reader");
    await expect(ask({ kind: "user", userId: reader.id, sessionId: "s" }, 2)).rejects.toMatchObject({
      code: "forbidden",
    });
    const stranger = await makeMember((await makeLab("Other")).team.id, "owner");
    await expect(ask({ kind: "user", userId: stranger.id, sessionId: "s" }, 2)).rejects.toMatchObject({
      code: "not-found",
    });
  });
});
