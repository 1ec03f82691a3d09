import { eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { logbook, outsideStructures, pairMatrixBlocks } from "~/db/schema.server";
import { unpackAccepted } from "~/lib/accepted-data";
import { packedLength, pairMatrix } from "~/lib/align/pair-matrix";
import { makePlan } from "~/lib/align/plan";
import { makeGraph } from "~/lib/structure";
import { computeMatrix } from "~/services/jobs/pool.server";
import type { OutsideView } from "~/services/outside/list-outside.server";
import { listOutside } from "~/services/outside/list-outside.server";
import { makeMember } from "../factories/people";
import { formOf, makeLab, reference, sifted, takenIn, withJobs } from "../factories/upload";
import { call, ORIGIN } from "../setup/app";

// The comments of this file hold a bare number; under a key an outside structure can carry one too.
const file = reference("ensembles/difluoroethane.xyz")
  .toString()
  .replaceAll(/^\s*(-?\d+\.\d+)\s*$/gm, "energy=$1");
const firstFrame = file.split("\n").slice(0, 10);

let running: { stop(): Promise<void> };
let lab: Awaited<ReturnType<typeof makeLab>>;
let ensembleId = "";
let siftId = "";
let kept: number[] = [];
let mirrorRmsds: number[] = [];

beforeAll(async () => {
  running = await withJobs();
  lab = await makeLab();
  const fields = { level: "MMFF94", energyUnit: "kcal/mol", energyFrom: "key:energy" };
  ensembleId = (await takenIn(lab.token, [{ name: "search.xyz", content: file }], fields)).id;
  const sift = await sifted(lab.token, ensembleId, { level: "MMFF94", mirror: "keep" });
  siftId = sift.id;
  kept = sift.result?.kept.map(({ frame }) => frame) ?? [];
  mirrorRmsds = sift.result?.kept.map(({ mirrorRmsd }) => mirrorRmsd) ?? [];
}, 120_000);

afterAll(() => running.stop());

const asAnalyst = (path: string, init: Parameters<typeof call>[1] = {}) =>
  call(path, { origin: ORIGIN, cookie: lab.analyst.cookie, ...init });

async function acceptedFrames() {
  return unpackAccepted(await (await asAnalyst(`/files/ensembles/${ensembleId}/accepted`)).arrayBuffer());
}

describe("accepted frames for a browser", () => {
  it("come with elements, bonds and coordinates as read, and are not sent twice", async () => {
    const path = `/files/ensembles/${ensembleId}/accepted`;
    const answer = await asAnalyst(path);
    const data = unpackAccepted(await answer.arrayBuffer());
    expect(Array.from(data.numbers)).toEqual(Array.from({ length: 200 }, (_, k) => k + 1));
    const atoms = firstFrame.slice(2).map((line) => line.trim().split(/\s+/));
    const number: Record<string, number> = { H: 1, C: 6, F: 9 };
    expect([...data.elements]).toEqual(atoms.map(([symbol = ""]) => number[symbol]));
    expect([...data.positions.subarray(0, 24)]).toEqual(atoms.flatMap(([, ...xyz]) => xyz.map(Number)));
    expect(data.energies).toBeNull();
    const headers = { "if-none-match": answer.headers.get("etag") ?? "" };
    expect((await asAnalyst(path, { headers })).status).toBe(304);
  });
});

describe("the distances of all pairs", () => {
  const ask = (frames: string, cookie = lab.analyst.cookie) =>
    asAnalyst(`/files/sifts/${siftId}/pair-matrix`, {
      method: "POST",
      cookie,
      body: JSON.stringify({ frames }),
      headers: { "content-type": "application/json" },
    });

  it("are computed once, kept, and written out pair by pair", async () => {
    const asked = await ask("compared");
    expect(asked.status).toBe(202);
    const { id, of } = await asked.json();
    expect(of).toBe(packedLength(200));
    const done = await (await asAnalyst(`/files/matrices/${id}?wait=30`)).json();
    expect(done).toMatchObject({ status: "done", progress: 1, pairs: of });
    expect((await (await ask("compared")).json()).id).toBe(id);
    // Those of the distinct set are other ones, which nobody asked for yet.
    expect(await (await asAnalyst(`/files/sifts/${siftId}/pair-matrix`)).json()).toEqual({ matrix: null });

    const { elements, bonds, positions } = await acceptedFrames();
    const plan = makePlan(makeGraph(elements, bonds), "heavy+polarH");
    const { matrix } = pairMatrix({ plan, block: { atoms: 8, count: 200, positions } });
    const csv = await (await asAnalyst(`/files/matrices/${id}/distances.csv`)).text();
    const lines = csv.trimEnd().split("\r\n");
    expect(lines[0]).toBe("frame,other,rmsd [Å]");
    expect(lines).toHaveLength(of + 1);
    expect(lines[1]).toBe(`1,2,${matrix[0]!.toFixed(6)}`);
    expect(lines.at(-1)).toBe(`199,200,${matrix.at(-1)!.toFixed(6)}`);
    const stored = await db.select().from(pairMatrixBlocks).where(eq(pairMatrixBlocks.matrixId, id));
    expect(Buffer.concat(stored.map(({ data }) => data))).toEqual(Buffer.from(matrix.buffer));
  });

  it("of the distinct set stand in its order", async () => {
    const { id } = await (await ask("kept")).json();
    await asAnalyst(`/files/matrices/${id}?wait=30`);
    const csv = await (await asAnalyst(`/files/matrices/${id}/distances.csv`)).text();
    const reader = await makeMember(lab.team.id, "reader");
    const found = await asAnalyst(`/files/sifts/${siftId}/pair-matrix`, { cookie: reader.cookie });
    expect(await found.json()).toMatchObject({ matrix: { id, status: "done" } });
    const pairs = kept.flatMap((a, i) => kept.slice(i + 1).map((b) => `${a},${b}`));
    expect(
      csv
        .trimEnd()
        .split("\r\n")
        .slice(1)
        .map((line) => line.replace(/,[^,]*$/, "")),
    ).toEqual(pairs);
  });

  it("are the same bytes by one thread, by two and by the plain kernel", async () => {
    const { elements, isotopes, bonds, positions } = await acceptedFrames();
    const shared = new Float64Array(new SharedArrayBuffer(positions.byteLength));
    shared.set(positions);
    const compute = async (threads: number) => {
      const matrix = new Float32Array(new SharedArrayBuffer(4 * packedLength(200)));
      const answer = await computeMatrix(
        {
          ...{ elements, isotopes, bonds, atoms: 8, positions: shared, matrix },
          recipe: { atoms: "heavy", symmetry: true, mirror: true },
          counters: new Int32Array(new SharedArrayBuffer(12)),
          cancel: new Int32Array(new SharedArrayBuffer(4)),
        },
        { progress: () => {}, signal: new AbortController().signal },
        threads,
      );
      expect(answer.kind).toBe("done");
      return Buffer.from(matrix.buffer).toString("base64");
    };
    const plan = makePlan(makeGraph(elements, bonds), "heavy");
    const plain = pairMatrix({ plan, block: { atoms: 8, count: 200, positions }, mirror: true });
    const one = await compute(1);
    expect(await compute(2)).toBe(one);
    expect(Buffer.from(plain.matrix.buffer).toString("base64")).toBe(one);
  });

  it("stop at once when their word says so", async () => {
    const { elements, isotopes, bonds, positions } = await acceptedFrames();
    const cancel = new Int32Array(new SharedArrayBuffer(4));
    Atomics.store(cancel, 0, 1);
    const answer = await computeMatrix(
      {
        ...{ elements, isotopes, bonds, atoms: 8, positions, cancel },
        recipe: { atoms: "all", symmetry: true, mirror: true },
        matrix: new Float32Array(new SharedArrayBuffer(4 * packedLength(200))),
        counters: new Int32Array(new SharedArrayBuffer(12)),
      },
      { progress: () => {}, signal: new AbortController().signal },
      2,
    );
    expect(answer.kind).toBe("cancelled");
  });

  it("are not for readers to ask for", async () => {
    const reader = await makeMember(lab.team.id, "reader");
    expect((await ask("kept", reader.cookie)).status).toBe(403);
  });
});

describe("a structure from outside", () => {
  const send = (
    name: string,
    content: string,
    fields: Record<string, string> = {},
    cookie = lab.analyst.cookie,
  ) =>
    asAnalyst(`/ensembles/${ensembleId}/compare.data`, {
      method: "POST",
      cookie,
      body: formOf([{ name, content }], fields),
    });
  const list = (): Promise<OutsideView[]> => listOutside(ensembleId);
  const page = async (search = "") =>
    (await (await asAnalyst(`/ensembles/${ensembleId}/compare${search}`)).text())
      .replaceAll(/<script[\s\S]*?<\/script>/g, "")
      .replaceAll(/<!-- -->/g, "");
  const csvOf = async (outside: string) => {
    const text = await (await asAnalyst(`/files/sifts/${siftId}/outside.csv?outside=${outside}`)).text();
    const [head = "", ...lines] = text.trimEnd().split("\r\n");
    return lines.map((line) =>
      Object.fromEntries(line.split(",").map((cell, k) => [head.split(",")[k], cell])),
    );
  };
  /** The first frame, atoms in reverse. */
  const pose = (comment: string, keep = (_line: string) => true) => {
    const atoms = firstFrame.slice(2).filter(keep).reverse();
    return `${atoms.length}\n${comment}\n${atoms.join("\n")}\n`;
  };

  it("is mapped, with the energy that stands where the ensemble's own do", async () => {
    const energy = Number(/energy=(\S+)/.exec(firstFrame[1] ?? "")?.[1]);
    expect((await send("pose.xyz", pose(`energy=${energy + 2.5}`))).status).toBe(200);
    const [found] = (await list()).slice(-1);
    // Both ways round: the molecule's ends are alike.
    const { elements } = await acceptedFrames();
    const { map = [], elements: theirs = [] } = found?.data ?? {};
    expect([...map].sort()).toEqual([0, 1, 2, 3, 4, 5, 6, 7]);
    expect(map.map((atom) => theirs[atom])).toEqual([...elements]);
    expect(found?.data.energy).toMatchObject({ value: energy + 2.5, from: "key:energy" });
    const lowest = Math.min(...[...file.matchAll(/energy=(\S+)/g)].map(([, text]) => Number(text)));
    expect(found?.strain?.kcal).toBeCloseTo(energy + 2.5 - lowest, 9);
    expect(found?.sha256).toMatch(/^[0-9a-f]{64}$/);
  });

  it("is compared on the server: page and CSV read without script", async () => {
    const [{ id = "", strain = null } = {}] = (await list()).slice(-1);
    const rows = await csvOf(id);
    expect(rows.map(({ frame }) => Number(frame)).sort((a, b) => a - b)).toEqual(
      [...kept].sort((a, b) => a - b),
    );
    // Frame 1 itself, or the conformer that it repeats within the tolerance of the sift.
    expect(Number(rows[0]?.["RMSD [Å]"])).toBeLessThan(0.2);
    const rmsds = rows.map((row) => Number(row["RMSD [Å]"]));
    expect(rmsds).toEqual([...rmsds].sort((a, b) => a - b));
    expect(new Set(rows.map(({ structure }) => structure))).toEqual(new Set(["pose.xyz"]));
    const above = Number(rows[0]?.["energy of the structure above the lowest [kcal/mol]"]);
    expect(above).toBeCloseTo(strain?.kcal ?? Number.NaN, 9);
    const html = await page(`?outside=${id}`);
    expect(html).toContain(`pose.xyz is nearest to ${rows[0]?.conformer}`);
    expect(html).toContain("Strain, together");
    expect(html).toContain("was mapped onto the molecule by its bonds");
    expect(html).toContain("Torsions of");
    expect((await asAnalyst(`/files/sifts/${siftId}/outside.csv?outside=none`)).status).toBe(404);
  });

  it("may come without hydrogens, from an SDF with its own bonds, and without an energy", async () => {
    const heavy = firstFrame.slice(2).filter((line) => !/^\s*H/.test(line));
    const at = heavy.map((line) => {
      const [symbol = "", ...xyz] = line.trim().split(/\s+/);
      return `${xyz.map((x) => Number(x).toFixed(4).padStart(10)).join("")} ${symbol.padEnd(3)} 0  0`;
    });
    const order = heavy.map((line) => line.trim()[0]);
    const [f1, f2] = [order.indexOf("F"), order.lastIndexOf("F")];
    const [c1, c2] = [order.indexOf("C"), order.lastIndexOf("C")];
    const near = (a: number, b: number) => {
      const xyz = (k: number) => heavy[k]!.trim().split(/\s+/).slice(1).map(Number);
      return Math.hypot(...xyz(a).map((x, c) => x - xyz(b)[c]!));
    };
    const bonds = [
      [c1, c2],
      [f1, near(f1, c1) < near(f1, c2) ? c1 : c2],
      [f2, near(f2, c1) < near(f2, c2) ? c1 : c2],
    ].map(([a = 0, b = 0]) => `${String(a + 1).padStart(3)}${String(b + 1).padStart(3)}  1  0`);
    const sdf = [
      "ligand",
      "  test    12012600003D",
      "",
      "  4  3  0  0  0  0  0  0  0  0999 V2000",
      ...at,
      ...bonds,
      "M  END",
      "$$$$",
      "",
    ];
    const answer = await send("ligand.sdf", sdf.join("\n"));
    expect([answer.status, await answer.text()]).toEqual([200, expect.stringContaining("ligand.sdf")]);
    const [found] = (await list()).slice(-1);
    expect(found?.data.energy).toBeNull();
    expect(found?.data.map.filter((atom) => atom >= 0)).toHaveLength(4);
    expect(found?.data.remarks.join()).toContain("no hydrogens");
    const html = await page();
    expect(html).toContain("ligand.sdf is nearest to");
    expect(html).toContain("so its strain is not known");
    // The other one is a link away, where no script fills a list.
    expect(html).toMatch(/href="[^"]*outside=[a-z2-7]{16}[^"]*"[^>]*>pose\.xyz</);
  });

  it("without its hydrogens has no strain, whatever number it carries", async () => {
    const comment = firstFrame[1] ?? "";
    const bare = pose(comment, (line) => !/^\s*H/.test(line));
    const levelId = (await list()).find(({ strain }) => strain !== null)?.strain?.levelId ?? "";
    for (const [fields, words] of [
      [{}, /Its energy at MMFF94, −?[\d.]+\skcal\/mol as its file has it, was not used/],
      [{ level: levelId, energy: "-35.5" }, /Its energy at MMFF94, −35\.5\skcal\/mol as typed, was not used/],
    ] as const) {
      // Said in the answer of the act and beside the structure.
      expect(await (await send("bare.xyz", bare, fields)).text()).toMatch(words);
      const [found] = (await list()).slice(-1);
      expect(found?.data.energy).not.toBeNull();
      expect(found?.strain).toBeNull();
      expect((await page()).match(new RegExp(words, "g"))).toHaveLength(1);
    }
    // The second of a name is told apart wherever it is named.
    const [first, second] = (await list()).slice(-2);
    expect([first?.name, second?.name]).toEqual(["bare.xyz", "bare.xyz, 2"]);
    expect(await (await asAnalyst(`/files/sifts/${siftId}/outside.csv`)).text()).toContain('"bare.xyz, 2"');
  });

  it.each([
    ["another molecule", "3\nwater\nO 0 0 0\nH 0.96 0 0\nH -0.24 0.93 0\n", {}, "another molecule"],
    ["nothing that can be read", "hello\nworld\n", {}, "hello.xyz"],
    ["an energy that is not there", pose("nothing here"), { level: "own" }, "Type it in kcal/mol"],
    ["an energy without its level", pose("x"), { energy: "-35.5" }, "choose the level"],
    ["an energy that is no number", pose("x"), { level: "own", energy: "low" }, "is no number"],
  ] as const)("is refused in words: %s", async (_, content, asked, words) => {
    const before = (await list()).length;
    const level = (await list()).find(({ strain }) => strain !== null)?.strain?.levelId ?? "";
    const fields = "level" in asked ? { ...asked, level } : asked;
    const answer = await send("hello.xyz", content, fields);
    expect(answer.status).toBe(422);
    expect(await answer.text()).toContain(words);
    expect(await list()).toHaveLength(before);
  });

  it("near to a shape of which both hands are kept: the population is said to be that of one", async () => {
    // Kept apart by this sift: gauche to either side; anti is its own mirror image.
    const apart = mirrorRmsds.findIndex((rmsd) => rmsd > 0.5);
    const own = mirrorRmsds.findIndex((rmsd) => rmsd < 0.05);
    for (const [at, said] of [
      [
        apart,
        /That counts one hand only: c\d+ is its mirror image and is kept apart, with \d+\s% of its own\./,
      ],
      [own, null],
    ] as const) {
      const lines = file.split("\n").slice(10 * (kept[at]! - 1), 10 * kept[at]!);
      await send("shape.xyz", `${lines.join("\n")}\n`, { level: "none" });
      const html = await page();
      expect(html).toContain(`is nearest to c${at + 1}, 0.00`);
      if (said) expect(html).toMatch(said);
      else expect(html).not.toContain("one hand only");
    }
  });

  it("is taken away and brought back, and the logbook says so", async () => {
    const [{ id = "" } = {}] = await list();
    const act = (intent: string) =>
      asAnalyst(`/ensembles/${ensembleId}/compare.data`, {
        method: "POST",
        body: new URLSearchParams({ intent, outside: id }),
      });
    expect((await act("remove")).status).toBe(200);
    expect((await list()).map((one) => one.id)).not.toContain(id);
    expect((await act("remove")).status).toBe(404);
    expect(await page()).toContain("Deleted within thirty days");
    expect((await act("restore")).status).toBe(200);
    expect((await list()).map((one) => one.id)).toContain(id);
    const types = (await db.select().from(logbook).where(eq(logbook.ensembleId, ensembleId))).map(
      (e) => e.type,
    );
    for (const type of ["outside-added", "outside-removed", "outside-restored", "pair-matrix"])
      expect(types).toContain(type);
  });

  it("stands in the methods text of Hand-over", async () => {
    const html = (await (await asAnalyst(`/ensembles/${ensembleId}/hand-over`)).text()).replaceAll(
      "<!-- -->",
      "",
    );
    for (const { name } of await list()) expect(html).toContain(`The outside structure ${name} (SHA-256 `);
  });

  it("is seen by readers, who add none", async () => {
    const reader = await makeMember(lab.team.id, "reader");
    expect((await asAnalyst(`/ensembles/${ensembleId}/compare`, { cookie: reader.cookie })).status).toBe(200);
    expect((await send("pose.xyz", pose("x"), {}, reader.cookie)).status).toBe(403);
    const rows = await db
      .select()
      .from(outsideStructures)
      .where(eq(outsideStructures.ensembleId, ensembleId));
    expect(rows.every(({ createdBy }) => createdBy === lab.analyst.id)).toBe(true);
  });
});
