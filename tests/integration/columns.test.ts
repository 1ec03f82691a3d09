import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { EnsembleAnswer } from "~/lib/api/schemas";
import { makeMember, tokenOf } from "../factories/people";
import { storedRows } from "../factories/stored";
import {
  BUTANE,
  formOf,
  frame,
  makeLab,
  post,
  reference,
  type Sent,
  sifted,
  takenIn,
  withJobs,
} from "../factories/upload";
import { call } from "../setup/app";

let token = "";
let team = { id: "" };
let jobs: { stop(): Promise<void> };

beforeAll(async () => {
  jobs = await withJobs();
  const lab = await makeLab();
  token = lab.token;
  team = lab.team;
});
afterAll(() => jobs.stop());

type Vector = [number, number, number];
const dot = (a: Vector, b: Vector) => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];

/** Butane with its last methyl group turned about the middle bond: frames that differ. */
function butane(degrees: number): string[] {
  const places = BUTANE.map((line) => line.split(" ").slice(1).map(Number) as Vector);
  const [from, to] = [places[1], places[2]] as [Vector, Vector];
  const along = to.map((x, k) => x - (from[k] ?? 0)) as Vector;
  const axis = along.map((x) => x / Math.sqrt(dot(along, along))) as Vector;
  const [c, s] = [Math.cos((degrees * Math.PI) / 180), Math.sin((degrees * Math.PI) / 180)];
  return BUTANE.map((line, atom) => {
    if (![3, 11, 12, 13].includes(atom)) return line;
    const r = (places[atom] as Vector).map((x, k) => x - (to[k] ?? 0)) as Vector;
    const across: Vector = [
      axis[1] * r[2] - axis[2] * r[1],
      axis[2] * r[0] - axis[0] * r[2],
      axis[0] * r[1] - axis[1] * r[0],
    ];
    const turned = r.map((x, k) => {
      const lengthwise = (axis[k] ?? 0) * dot(axis, r) * (1 - c);
      return (to[k] ?? 0) + x * c + (across[k] ?? 0) * s + lengthwise;
    });
    return `${line.split(" ")[0]} ${turned.map((x) => x.toFixed(6)).join(" ")}`;
  });
}

let made = 0;
/** An ensemble of so many frames, labelled, with energies at MMFF94; each call makes one of its own. */
async function ensemble(count: number, fields: Record<string, string> = {}): Promise<EnsembleAnswer> {
  made += 1;
  const text = Array.from({ length: count }, (_, k) =>
    frame(`name="conf_${k + 1}" energy=${(k * 0.5 + made / 1000).toFixed(4)}`, butane(k * 3)),
  ).join("");
  return takenIn(token, [{ name: `run${made}.xyz`, content: text }], {
    level: "MMFF94",
    energyUnit: "kcal/mol",
    energyFrom: "key:energy",
    ...fields,
  });
}

async function add(id: string, file: Sent, fields: Record<string, string> = {}, as = token) {
  const response = await call(`/api/v1/ensembles/${id}/columns`, {
    method: "POST",
    token: as,
    body: formOf([file], fields),
  });
  return { status: response.status, body: await response.json() };
}

const table = (content: string, name = "table.csv"): Sent => ({ name, content });
const get = async (id: string): Promise<EnsembleAnswer> =>
  (await call(`/api/v1/ensembles/${id}`, { token })).json();

describe("a table", () => {
  it("adds energies as levels and properties as columns, units deciding", async () => {
    const { id } = await ensemble(6);
    const { status, body } = await add(
      id,
      table(
        "frame,cheap [kcal/mol],reference [kcal/mol],rg [Å],phi [deg]\n1,0.3,0,3.1,60\n2,0,0.4,3.2,61\n3,1.4,0.9,3.3,62\n4,1.1,1.5,3.4,63\n5,2.9,2.2,,64\n6,2.5,3,3.6,65\n",
      ),
    );
    expect(status).toBe(201);
    expect(body.columns).toMatchObject([
      { name: "cheap", kind: "energy", unit: "kcal/mol", count: 6, missing: 0 },
      { name: "reference", kind: "energy", unit: "kcal/mol", count: 6, missing: 0 },
      { name: "rg", kind: "property", unit: "Å", count: 5, missing: 1 },
      { name: "phi", kind: "property", unit: "deg", count: 6, missing: 0 },
    ]);
    const now = await get(id);
    expect(now.levels.map(({ name }) => name)).toEqual(["MMFF94", "cheap", "reference"]);
    const cheap = now.levels.find(({ name }) => name === "cheap");
    expect(now.columns.find(({ name }) => name === "cheap")?.id).toBe(cheap?.id);
    expect(body.messages.filter(({ code }: { code: string }) => code === "E13")).toHaveLength(2);
  });

  it("weighs and sifts at a level of a table", async () => {
    const { id } = await ensemble(3);
    await add(id, table("label,DFT [hartree]\nconf_3,-158.3\nconf_1,-158.301\nconf_2,-158.2995\n"));
    const sift = await sifted(token, id, { level: "DFT", energyTolerance: null, rmsdTolerance: 0 });
    expect(sift.result?.kept.map(({ frame: number }) => number)).toEqual([1, 3, 2]);
    expect(sift.result?.kept[1]?.relativeEnergy).toBeCloseTo(0.627509474, 9);
  });

  it("takes kind, level, unit and energy kind from the fields", async () => {
    const { id } = await ensemble(3);
    const { status, body } = await add(id, table("frame,E\n1,-1.5\n2,-1.6\n3,-1.7\n"), {
      kind: "energy",
      level: "B3LYP",
      energyUnit: "eV",
      energyKind: "free",
      energyTemperature: "310",
    });
    expect([status, body.columns[0].name, body.columns[0].unit]).toEqual([201, "B3LYP", "eV"]);
    const level = (await get(id)).levels.find(({ name }) => name === "B3LYP");
    expect(level).toMatchObject({ unit: "eV", energyKind: "free", temperature: 310 });
    const forced = await add(id, table("frame,gap [eV]\n1,5\n2,6\n3,7\n"), { kind: "property" });
    expect(forced.body.columns[0]).toMatchObject({ name: "gap", kind: "property", unit: "eV" });
  });

  it("says what of the request could not be used", async () => {
    const messages = async (content: string, fields: Record<string, string>) => {
      const { id } = await ensemble(3);
      const { status, body } = await add(id, table(content), fields);
      expect(status).toBe(201);
      return body.messages.map((one: { message: string }) => one.message).join("\n");
    };
    const energies = "frame,b [kcal/mol]\n1,0\n2,0.1\n3,0.32\n";
    expect(await messages(energies, { energyUnit: "hartree" })).toContain(
      'energyUnit=hartree was not used for "b": its header says kcal/mol, and kcal/mol was taken.',
    );
    expect(await messages("frame,a,b\n1,0,1\n2,2,3\n3,1,1\n", { energyUnit: "hartree" })).toContain(
      'energyUnit=hartree was not used: "a", "b" have no unit, and nobody can tell which of them are energies.',
    );
    expect(await messages(energies, { energyKind: "electronic", energyTemperature: "298.15" })).toContain(
      "belong to no temperature",
    );
    expect(await messages(energies, { energyKind: "free" })).toContain("their temperature is not stated");
    expect(await messages("frame,phi\n1,3.1\n2,-3.1\n3,3\n", { rule: "circular" })).toContain(
      "it is averaged as an angle in degrees. No value goes beyond 6.29: are they radians?",
    );
    const long = await messages(`frame,${"x".repeat(130)}\u202e [ppm]\n1,1\n2,2\n3,4\n`, {});
    expect(long).toContain("A name has 131 characters");
    expect(await messages("frame,ab\u202e [ppm]\n1,1\n2,2\n3,4\n", {})).toContain("ab\\u202e");
  });

  it("says what helps where a unit is none of an energy's, and what a field may be", async () => {
    const { id } = await ensemble(3);
    const shift = table("frame,a [ppm]\n1,1\n2,2\n3,3\n");
    const refused = await add(id, shift, { kind: "energy", energyUnit: "kcal/mol" });
    expect(refused.status).toBe(422);
    expect(refused.body.detail).toContain("a unit that stands with the numbers counts before energyUnit");
    expect(refused.body.detail).not.toContain("State energyUnit");
    const helped = await add(id, shift, { kind: "energy", columns: '[{"column":2,"unit":"kcal/mol"}]' });
    expect([helped.status, helped.body.columns[0].unit]).toEqual([201, "kcal/mol"]);
    const wrong: Record<string, string>[] = [{ rule: "mean" }, { energyKind: "gibbs" }, { replace: "yes" }];
    for (const fields of wrong) {
      const [field, value] = Object.entries(fields)[0] ?? ["", ""];
      const { status, body } = await add(id, shift, fields);
      expect([status, body.errors[0].field]).toEqual([422, field]);
      expect(body.errors[0].message).toMatch(new RegExp(`^Expected "[^;]*; found "${value}"`));
    }
    const angle = await add(id, table("frame,d [Å]\n1,1\n2,2\n3,3\n"), { rule: "circular" });
    expect(angle.body.detail).toContain("circular averages an angle in °, rad or mrad");
  });

  it("refuses what it leaves open, naming the field that answers it, and stores nothing", async () => {
    const { id } = await ensemble(3);
    const before = await storedRows();
    const open: [Sent, Record<string, string>, string][] = [
      [table("frame,E\n1,5\n2,6\n3,7\n"), { kind: "energy" }, "energyUnit"],
      [table("frame,E [debye]\n1,5\n2,6\n3,7\n"), { kind: "energy" }, "energyUnit"],
      [table("frame;rg [nm]\n1;0,435\n2;0,5\n3;0,6\n"), {}, "numbers"],
      [table("frame;V\n1;1.234,5\n2;5\n3;6\n"), {}, "numbers"],
      [table("frame,rg [nm]\n0,1\n1,2\n2,3\n"), {}, "firstFrame"],
      [table("1,2.5\n2,2.6\n3,2.7\n"), {}, "header"],
      [table("who,rg\n1,2.5\n2,2.6\n3,2.7\n"), {}, "key"],
      [table("label,rg\nCONF_1,2.5\nconf_2,2.6\nconf_3,1\n"), {}, "labels"],
      [table("frame,mu [debye]\n1,2.5\n2,2.6\n3,2.7\n"), { rule: "circular" }, "rule"],
      [table("frame,a [eV],b [eV]\n1,1,1\n2,2,2\n3,3,3\n"), { level: "X" }, "level"],
    ];
    for (const [file, fields, field] of open) {
      const { status, body } = await add(id, file, fields);
      expect(
        [status, body.errors?.map((one: { field?: string }) => one.field)],
        String(file.content),
      ).toEqual([422, [field]]);
    }
    expect(await storedRows()).toEqual(before);
  });

  it("takes the answers to all of these", async () => {
    const { id } = await ensemble(3);
    const comma = await add(id, table("frame;rg [nm]\n1;0,435\n2;1.234,5\n3;0,6\n"), {
      numbers: "comma-thousands",
    });
    expect(comma.body.columns[0]).toMatchObject({ count: 3 });
    const zero = await add(id, table("index,d_A\n0,1\n1,2\n2,3\n"), { firstFrame: "0" });
    expect(zero.body.columns[0]).toMatchObject({ name: "d_A", count: 3 });
    const bare = await add(id, table("1\t2.5\n2\t2.6\n3\t2.7\n", "bare.tsv"), { header: "none" });
    expect(bare.body.columns[0]).toMatchObject({ name: "column 2", count: 3 });
    const loose = await add(id, table("label,x\nCONF_1,2.5\nconf_2 ,2.6\nconf_3,1\n"), { labels: "loose" });
    expect(loose.body.columns[0]).toMatchObject({ count: 3 });
  });

  it("refuses double keys, foreign keys, wrong atoms and broken quotes with their lines", async () => {
    const { id } = await ensemble(3);
    const bad: [string, string, number][] = [
      ["frame,x\n1,5\n2,5\n1,6\n", "C08", 4],
      ["frame,x\n7,5\n8,6\n", "C07", 2],
      ["frame,C5\n1,5\n2,6\n", "C15", 1],
      ["frame,H99\n1,5\n2,6\n", "C15", 1],
      ['frame,x\n1,5\n2,"6\n', "C11", 3],
      ["frame,a,b,c\n1,0,5,1,5,2,5\n2,0,5,1,5,2,5\n", "C03", 2],
    ];
    for (const [content, code, line] of bad) {
      const { status, body } = await add(id, table(content));
      expect([status, body.code, body.errors[0].line], content).toEqual([422, code, line]);
    }
    expect((await get(id)).columns).toHaveLength(1);
  });

  it("keeps a missing value missing and says which", async () => {
    const { id } = await ensemble(4);
    const { body } = await add(id, table("frame,DFT [kcal/mol],n\n1,0.1,1\n2,NA,2\n4,0.3,x\n9,1,1\n"));
    expect(body.columns).toMatchObject([
      { name: "DFT", count: 2, missing: 2 },
      { name: "n", count: 2, missing: 2 },
    ]);
    const said = body.messages.map((m: { code: string; frame?: number; line?: number }) => [
      m.code,
      m.frame,
      m.line,
    ]);
    expect(said).toEqual(
      expect.arrayContaining([
        ["E10", 2, 3],
        ["C07", 3, undefined],
        ["C14", undefined, 4],
        ["C07", undefined, 5],
      ]),
    );
    const sift = await sifted(token, id, { level: "DFT" });
    expect(sift.result?.withoutEnergy).toEqual([2, 3]);
  });

  it("takes a name once, or replaces under the same id", async () => {
    const { id } = await ensemble(3);
    const first = await add(id, table("frame,DFT [kcal/mol]\n1,0\n2,1\n3,2\n"));
    const again = await add(id, table("frame,DFT [kcal/mol]\n1,0\n2,1\n3,3\n"));
    expect([again.status, again.body.errors[0].field]).toEqual([409, "replace"]);
    const replaced = await add(id, table("frame,DFT [kJ/mol]\n1,0\n2,4\n"), { replace: "true" });
    expect(replaced.body.columns[0]).toMatchObject({
      id: first.body.columns[0].id,
      unit: "kJ/mol",
      missing: 1,
    });
    const other = await add(id, table("frame,DFT [kJ/mol]\n1,0\n"), { replace: "true", kind: "property" });
    expect(other.status).toBe(409);
  });

  it("sent again is refused by its names, also at the same moment, and as a replacement changes nothing more", async () => {
    const { id } = await ensemble(3);
    const file = table("frame,DFT [kcal/mol],rg [Å]\n1,0,4\n2,1,5\n3,2,6\n");
    const both = await Promise.all([add(id, file), add(id, file)]);
    expect(both.map(({ status }) => status).sort()).toEqual([201, 409]);
    const before = await storedRows();
    const again = await add(id, file, { replace: "true" });
    expect([again.status, again.body]).toEqual([201, both.find(({ status }) => status === 201)?.body]);
    expect(await storedRows()).toEqual(before);
    expect((await add(id, file, { rule: "r-6" })).status).toBe(409);
  });

  it("is seen by a preview that keeps nothing", async () => {
    const { id } = await ensemble(3);
    const before = await storedRows();
    const { status, body } = await add(id, table("frame;rg [nm]\n0;0,435\n2;0,5\n"), { preview: "true" });
    expect(status).toBe(200);
    expect(body.questions.map((q: { id: string }) => q.id)).toEqual(["numbers", "firstFrame"]);
    expect(body).toMatchObject({ type: "table", delimiter: "semicolon", header: ["frame", "rg [nm]"] });
    expect(body.rows).toEqual([
      ["0", "0,435"],
      ["2", "0,5"],
    ]);
    expect(await storedRows()).toEqual(before);
  });

  it("shows a table as the proposed way of writing numbers reads it, while that is open", async () => {
    const { id } = await ensemble(3);
    const file = table("frame;DFT [kcal/mol];rg [nm]\n1;0,25;0,4\n2;1,5;0,5\n3;2,0;0,6\n");
    const { body } = await add(id, file, { preview: "true" });
    type Asked = { id: string; options: { id: string; proposed?: boolean }[] };
    const proposed = (questions: Asked[]) =>
      questions.map(({ id: asked, options }) => [asked, options.find((one) => one.proposed)?.id ?? null]);
    expect(proposed(body.questions)).toEqual([["numbers", "comma"]]);
    expect(body.columns.map(({ count }: { count: number }) => count)).toEqual([3, 3]);
    const codes = body.messages.map(({ code }: { code: string }) => code);
    expect(codes).toEqual(["E13"]);
    expect((await add(id, file)).status).toBe(422);
    // Two ways of writing in one table: none is proposed, and nothing is said of energies that were not read.
    const mixed = table("frame;DFT [kcal/mol]\n1;0,25\n2;1.234,5\n3;1,234.5\n");
    const open = (await add(id, mixed, { preview: "true" })).body;
    expect(proposed(open.questions)).toEqual([["numbers", null]]);
    expect(open.messages.filter(({ code }: { code: string }) => code.startsWith("E"))).toEqual([]);
  });

  it("takes what looks like an energy and names no unit as a property, and says so", async () => {
    const { id } = await ensemble(3);
    const file = table(
      "frame,energy,E,near atoms,torsion,count\n1,1,2,-157.1,5,1\n2,2,3,-157.2,6,2\n3,4,5,-157.3,7,3\n",
    );
    const { body } = await add(id, file, { preview: "true" });
    const like = body.columns.filter(({ looksLikeEnergy }: { looksLikeEnergy: boolean }) => looksLikeEnergy);
    expect(like.map(({ name, kind }: { name: string; kind: string }) => [name, kind])).toEqual([
      ["energy", "property"],
      ["E", "property"],
      ["near atoms", "property"],
    ]);
    expect(body.messages).toContainEqual(
      expect.objectContaining({
        ...{ code: "C06", severity: "remark", column: 2 },
        message: '"energy" looks like energies and names no unit; it is taken as a property.',
      }),
    );
    const said = JSON.stringify([
      { column: 2, kind: "property" },
      { column: 3, kind: "energy" },
    ]);
    const answered = (await add(id, file, { preview: "true", columns: said })).body;
    expect(answered.columns.map(({ looksLikeEnergy: one }: { looksLikeEnergy: boolean }) => one)).toEqual([
      ...[false, false, true, false, false],
    ]);
    expect(answered.questions.map((q: { id: string }) => q.id)).toEqual(["energyUnit"]);
    expect((await add(id, table("frame,energy\n1,1\n2,2\n3,4\n"))).body.columns).toMatchObject([
      { name: "energy", kind: "property", unit: null },
    ]);
  });

  it("takes no number that no molecule has: what is computed from two of them must not overflow", async () => {
    const { id } = await ensemble(4);
    const file = table(
      "frame,both [kcal/mol],e306 [hartree],r [Å]\n1,1e308,1e306,1e-300\n2,-1e308,0,1\n3,1,1,1\n4,2,2,1\n",
    );
    const { status, body } = await add(id, file);
    expect(status).toBe(201);
    expect(body.columns.map(({ count }: { count: number }) => count)).toEqual([2, 3, 4]);
    expect(body.messages).toContainEqual(
      expect.objectContaining({
        ...{ code: "C14", severity: "remark", line: 2, column: 2, found: "1e308" },
        message: 'Row 2 has a number out of range in "both"; the value counts as missing.',
        hint: "Numbers up to 1e50 are taken.",
      }),
    );
    const { result, id: siftId } = await sifted(token, id, { level: "e306" });
    expect(result!.withoutEnergy).toEqual([1]);
    const get = (path: string) => call(`/api/v1${path}`, { headers: { authorization: `Bearer ${token}` } });
    for (const path of [
      `/ensembles/${id}/comparison?level=both&reference=MMFF94`,
      `/ensembles/${id}/comparison?level=e306&reference=both&align=own-minimum`,
      `/sifts/${siftId}/populations?level=both`,
      `/sifts/${siftId}/averages.csv?level=both&sigma=0.5`,
    ])
      expect((await get(path)).status, path).toBe(200);
    const none = await add(id, table("frame,p\n1,nan\n2,1e400\n3,\n"));
    expect(none.body).toMatchObject({ status: 422, errors: [{ line: 3 }] });
    expect(none.body.detail).toContain("Numbers up to 1e50 are taken.");
  });

  it("says how angles that never turn are averaged, unless a rule was stated", async () => {
    const { id } = await ensemble(3);
    const angles = (name: string) => table(`frame,${name} [°]\n1,112.9\n2,113.4\n3,115\n`);
    const { body } = await add(id, angles("CCC angle"));
    expect(body.messages).toMatchObject([{ code: "C06", hint: expect.stringContaining("rule=linear") }]);
    expect((await add(id, angles("other angle"), { rule: "linear" })).body.messages).toEqual([]);
    expect((await add(id, angles("third"), { rule: "circular" })).body.messages).toEqual([]);
    expect((await add(id, table("frame,t [°]\n1,-60\n2,60\n3,180\n"))).body.messages).toEqual([]);
  });

  it("says in a preview what a replacement of another kind would be refused with", async () => {
    const { id } = await ensemble(3);
    await add(id, table("frame,part [kcal/mol]\n1,0\n2,1\n3,2\n"), { kind: "property" });
    const file = table("frame,part [kcal/mol]\n1,0\n2,1\n3,3\n");
    const asEnergy = JSON.stringify([{ column: 2, kind: "energy" }]);
    const stated = { replace: "true", columns: asEnergy };
    const { body } = await add(id, file, { ...stated, preview: "true" });
    const refused = await add(id, file, stated);
    expect(refused.status).toBe(409);
    expect(body.columns[0]).toMatchObject({ kind: "energy", exists: true, conflict: refused.body.detail });
    const fits = await add(id, file, { replace: "true", preview: "true" });
    expect(fits.body.columns[0]).toMatchObject({ kind: "property", exists: true, conflict: null });
  });

  it("asks for a unit with the spread that each would mean", async () => {
    const { id } = await ensemble(3);
    const file = table("frame,E\n1,-1.5\n2,-1.6\n3,-1.75\n");
    const { body } = await add(id, file, { preview: "true", kind: "energy" });
    const question = body.questions.find((q: { id: string }) => q.id === "energyUnit");
    const spread = (unit: string) =>
      question.options.find((option: { id: string }) => option.id === unit).spreadKcal;
    // 1 kcal is 4.184 kJ by definition.
    expect(spread("kcal/mol")).toBeCloseTo(0.25, 12);
    expect(spread("kJ/mol")).toBeCloseTo(0.25 / 4.184, 12);
    expect(spread("eV")).toBeGreaterThan(5);
    expect(spread("hartree")).toBeGreaterThan(100);
  });

  it("is refused from readers, foreign tokens and for foreign ensembles", async () => {
    const { id } = await ensemble(3);
    const reader = await makeMember(team.id, "reader");
    const { token: stranger } = await makeLab();
    const file = table("frame,x\n1,5\n");
    expect((await add(id, file, {}, await tokenOf(reader.id, team.id))).status).toBe(403);
    expect((await add(id, file, {}, stranger)).status).toBe(404);
    expect((await add(id, file, { colour: "red" })).status).toBe(422);
    expect((await post(token, `/ensembles/${id}/columns`, {})).status).toBe(415);
  });

  it("travels in export.csv with its unit, and reads back", async () => {
    const { id } = await ensemble(3);
    await add(id, table('frame,rg [Å],"=sum [ppm]"\n1,3.25,1\n2,-0.1,2\n3,3.3,3e-7\n'));
    const sift = await sifted(token, id, { level: "MMFF94", energyTolerance: null, rmsdTolerance: 0 });
    const csv = await (await call(`/api/v1/sifts/${sift.id}/export.csv`, { token })).text();
    expect(csv.split("\r\n")[0]).toBe(
      "frame,label,relativeEnergy,degeneracy,symmetryNumber,copies,found,population,MMFF94 [kcal/mol],rg [Å],'=sum [ppm]",
    );
    const other = await ensemble(3);
    const { status, body } = await add(other.id, table(csv, "export.csv"), { replace: "true" });
    expect(status).toBe(201);
    expect(body.columns.map(({ name }: { name: string }) => name).sort()).toEqual(["=sum", "MMFF94", "rg"]);
    const back = await sifted(token, other.id, { level: "MMFF94", energyTolerance: null, rmsdTolerance: 0 });
    const again = await (await call(`/api/v1/sifts/${back.id}/export.csv`, { token })).text();
    const values = (text: string) =>
      text
        .split("\r\n")
        .slice(1)
        .map((row) => row.split(",").slice(8).join());
    expect(values(again)).toEqual(values(csv));
  });
});

describe("a second structure file", () => {
  it("with the same frames in another order is matched by coordinates", async () => {
    const id = (
      await takenIn(token, [{ name: "ac-ala.xyz", content: reference("ensembles/ac-ala-nhme.xyz") }], {
        level: "MMFF94",
        energyUnit: "kcal/mol",
      })
    ).id;
    const text = reference("ensembles/ac-ala-nhme.xyz").toString("utf8");
    const lines = text.trimEnd().split("\n");
    const frames = Array.from({ length: 300 }, (_, k) => lines.slice(24 * k, 24 * (k + 1)));
    const turned = frames
      .map((one, k) => [one[0], `${one[1]} was=${k + 1}.5`, ...one.slice(2)].join("\n"))
      .reverse();
    const { status, body } = await add(
      id,
      { name: "again.xyz", content: `${turned.join("\n")}\n` },
      {
        level: "again",
        energyUnit: "kcal/mol",
        energyFrom: "key:was",
      },
    );
    expect(status).toBe(201);
    expect(body.columns).toMatchObject([{ name: "again", kind: "energy", count: 300, missing: 0 }]);
    const sift = await sifted(token, id, { level: "again", energyTolerance: null, rmsdTolerance: 0 });
    const kept = sift.result?.kept.map(({ frame: number, relativeEnergy }) => [number, relativeEnergy]) ?? [];
    expect(kept.slice(0, 3)).toEqual([
      [1, 0],
      [2, 1],
      [3, 2],
    ]);
  });

  it("of some frames lists the others, and refuses energies without a level", async () => {
    const { id } = await ensemble(4);
    const second = [2, 0, 20].map((k) => frame(`energy=${-k - 0.25}`, butane(k * 3))).join("");
    const file = { name: "second.xyz", content: second };
    const open = await add(id, file, { energyUnit: "kJ/mol" });
    expect([open.status, open.body.errors[0].field]).toEqual([422, "level"]);
    const unit = await add(id, file, { level: "UFF" });
    expect([unit.status, unit.body.errors[0].field]).toEqual([422, "energyUnit"]);
    const { status, body } = await add(id, file, { level: "UFF", energyUnit: "kJ/mol", kind: "energy" });
    expect(status).toBe(201);
    expect(body.columns).toMatchObject([{ name: "UFF", unit: "kJ/mol", count: 2, missing: 2 }]);
    const said = body.messages.filter(({ code }: { code: string }) => code === "E14");
    expect(said.map((m: { frame?: number }) => m.frame)).toEqual([2, 4, undefined]);
  });

  it("asks about decimal commas of energies and coordinates, and reads them once that is answered", async () => {
    const { id } = await ensemble(3);
    const commas = [0, 1].map((k) => frame(`energy=-1${k},25`, butane(k * 3)));
    const stated = { level: "comma", energyUnit: "kJ/mol" };
    const energies = { name: "commas.xyz", content: commas.join("") };
    const open = await add(id, energies, stated);
    expect([open.status, open.body.code, open.body.errors[0].field]).toEqual([422, "X22", "numbers"]);
    expect(open.body.detail).toContain('such as "-10,25"');
    const kept = await add(id, energies, { ...stated, numbers: "comma" });
    expect(kept.status).toBe(201);
    expect(kept.body.columns).toMatchObject([{ name: "comma", kind: "energy", count: 2, missing: 1 }]);
    const point = await add(id, energies, { ...stated, level: "point", numbers: "point" });
    expect([point.status, point.body.code]).toEqual([422, "E10"]);

    const coordinates = { name: "places.xyz", content: commas.join("").replaceAll(".", ",") };
    const asked = await add(id, coordinates, { ...stated, level: "places" });
    expect([asked.status, asked.body.errors[0].field]).toEqual([422, "numbers"]);
    const places = await add(id, coordinates, { ...stated, level: "places", numbers: "comma" });
    expect(places.body.columns).toMatchObject([{ name: "places", count: 2 }]);

    // One among others is a slip: its frame has no value.
    const lone = { name: "lone.xyz", content: [frame("energy=-9.5", butane(6)), ...commas].join("") };
    const slip = await add(
      id,
      { ...lone, content: lone.content.replace("-11,25", "-11.25") },
      {
        ...stated,
        level: "slip",
      },
    );
    expect(slip.body.columns).toMatchObject([{ name: "slip", count: 2, missing: 1 }]);
  });

  it("by number or label goes without structures", async () => {
    const { id } = await ensemble(3);
    const far = [15, 16, 17].map((k, n) => frame(`name=conf_${3 - n} energy=${n}.5`, butane(k * 3))).join("");
    const file = { name: "far.xyz", content: far };
    const fields = { energyUnit: "kcal/mol", energyFrom: "key:energy" };
    const none = await add(id, file, { ...fields, level: "a" });
    expect([none.status, none.body.code], JSON.stringify(none.body)).toEqual([422, "E14"]);
    expect((await add(id, file, { ...fields, level: "number", match: "number" })).status).toBe(201);
    expect((await add(id, file, { ...fields, level: "label", match: "label" })).status).toBe(201);
    const at = async (level: string) =>
      (await sifted(token, id, { level, energyTolerance: null, rmsdTolerance: 0 })).result?.kept.map(
        ({ frame: number }) => number,
      );
    expect(await at("number")).toEqual([1, 2, 3]);
    expect(await at("label")).toEqual([3, 2, 1]);
  });

  it("of another molecule is refused", async () => {
    const { id } = await ensemble(2);
    const { status } = await add(
      id,
      { name: "w.xyz", content: "3\nenergy=1\nO 0 0 0\nH 0.96 0 0\nH -0.2 0.94 0\n" },
      {
        level: "x",
        energyUnit: "eV",
      },
    );
    expect(status).toBe(422);
  });
});

describe("the comparison of two levels", () => {
  const compare = async (id: string, query: string) => {
    const response = await call(`/api/v1/ensembles/${id}/comparison?${query}`, { token });
    return { status: response.status, body: await response.json() };
  };

  it("of six conformers from a table gives every figure worked out by hand", async () => {
    const { id } = await ensemble(6);
    const rows = [0.3, 0, 1.4, 1.1, 2.9, 2.5].map((a, k) => `${k + 1},${a},${[0, 0.4, 0.9, 1.5, 2.2, 3][k]}`);
    await add(id, table(`frame,cheap [kcal/mol],reference [kcal/mol]\n${rows.join("\n")}\n`));
    const { body } = await compare(id, "level=cheap&reference=reference");
    expect(body).toMatchObject({
      n: 6,
      align: "least-squares",
      temperature: 298.15,
      sift: null,
      maxFrame: 5,
    });
    const figures = [
      body.mad,
      body.rmsd,
      body.max,
      body.pearson,
      body.spearman,
      body.kendall,
      body.populationOverlap,
    ];
    [0.46667, 0.48189, 0.66667, 0.893959, 0.828571, 0.6, 0.69924].forEach((value, k) => {
      expect(figures[k]).toBeCloseTo(value, 5);
    });
    expect(body.window).toEqual([
      { share: 0.9, kcal: expect.closeTo(1.4, 9), count: 4 },
      { share: 0.95, kcal: expect.closeTo(1.4, 9), count: 4 },
      { share: 0.99, kcal: expect.closeTo(2.9, 9), count: 6 },
    ]);
    const own = await compare(id, "level=cheap&reference=reference&align=own-minimum");
    expect(own.body.msd).toBeCloseTo(0.03333, 5);
    expect(own.body.max).toBeCloseTo(0.7, 9);
    const common = await compare(id, "level=cheap&reference=reference&align=common");
    expect(common.body.msd).toBeCloseTo(-0.26667, 5);
    expect(common.body.rmsd).toBeCloseTo(0.55076, 5);
  });

  it("says what it cannot tell: constant levels, few frames, unknown names", async () => {
    const { id } = await ensemble(4);
    await add(id, table("frame,flat [kcal/mol],three [kcal/mol]\n1,1,1\n2,1,2\n3,1,3\n4,1,NA\n"));
    const flat = await compare(id, "level=flat&reference=MMFF94");
    expect(flat.body).toMatchObject({ n: 4, pearson: null, spearman: null, kendall: null });
    const three = await compare(id, "level=three&reference=MMFF94");
    expect(three.body).toMatchObject({ n: 3, pearson: null, spearman: null, kendall: null });
    for (const [query, field] of [
      ["level=none&reference=MMFF94", "level"],
      ["level=flat&reference=none", "reference"],
      ["level=flat", "reference"],
      ["reference=flat", "level"],
      ["level=flat&reference=MMFF94&align=worst", "align"],
      ["level=flat&reference=MMFF94&sift=aaaaaaaaaaaaaaaa", "sift"],
      ["level=flat&reference=MMFF94&temperature=0", "temperature"],
    ]) {
      const { status, body } = await compare(id, query ?? "");
      expect([status, body.errors?.[0]?.field], query).toEqual([422, field]);
    }
  });

  it("with a sift takes its kept frames and their copies", async () => {
    const { id } = await ensemble(6);
    await add(id, table("frame,x [kcal/mol]\n1,0\n2,0.2\n3,1\n4,1.1\n5,2\n6,2.2\n"));
    const sift = await sifted(token, id, { level: "MMFF94", energyTolerance: 0.6, rmsdTolerance: 5 });
    expect(sift.result?.kept.length).toBeLessThan(6);
    const { body } = await compare(id, `level=x&reference=MMFF94&sift=${sift.id}`);
    expect(body).toMatchObject({ n: sift.result?.kept.length, sift: sift.id });
  });

  it("of the thousand frames of aminoester agrees with the independent program", async () => {
    const sent = [{ name: "aminoester.xyz", content: reference("ensembles/aminoester.xyz") }];
    const { id } = await takenIn(token, sent, { level: "MMFF94", energyUnit: "kcal/mol" });
    const second = { name: "aminoester.uff.xyz", content: reference("ensembles/aminoester.uff.xyz") };
    const added = await add(id, second, { level: "UFF", energyUnit: "kcal/mol" });
    expect(added.body.columns).toMatchObject([{ name: "UFF", count: 1000, missing: 0 }]);
    const expected = JSON.parse(
      reference("ensembles/aminoester.expected.json").toString(),
    ).two_level_A_uff_B_mmff94;
    const { body } = await compare(id, "level=UFF&reference=MMFF94&align=own-minimum");
    const own = expected.own_minimum_reference;
    expect(body.n).toBe(1000);
    expect(body.msd).toBeCloseTo(own.msd, 7);
    expect(body.mad).toBeCloseTo(own.mad, 7);
    expect(body.rmsd).toBeCloseTo(own.rmsd, 7);
    expect(body.max).toBeCloseTo(own.max_abs, 7);
    expect(body.maxFrame).toBe(own.max_abs_index + 1);
    expect(body.pearson).toBeCloseTo(expected.pearson_r, 8);
    expect(body.spearman).toBeCloseTo(expected.spearman_rho, 8);
    expect(body.kendall).toBeCloseTo(expected.kendall_tau_b, 8);
    const [at298] = expected.temperatures;
    expect(body.populationOverlap).toBeCloseTo(at298.population_overlap, 8);
    const windows = at298.window_at_A_keeping_B_population_kcal_mol;
    expect(body.window.map(({ kcal }: { kcal: number }) => kcal)).toEqual(
      ["0.9", "0.95", "0.99"].map((share) => expect.closeTo(windows[share], 7)),
    );
  });
});
