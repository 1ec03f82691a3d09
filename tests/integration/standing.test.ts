import { eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { sifts } from "~/db/schema.server";
import {
  BUTANE,
  formOf,
  frame,
  makeLab,
  post,
  type Sent,
  sifted,
  takenIn,
  withJobs,
} from "../factories/upload";
import { call } from "../setup/app";

let token: string;
let jobs: Awaited<ReturnType<typeof withJobs>>;
beforeAll(async () => {
  jobs = await withJobs();
  ({ token } = await makeLab());
});
afterAll(() => jobs.stop());

/** Butane with one hydrogen moved a little, so that every frame is a geometry of its own. */
const butane = (comment: string, by: number) =>
  frame(
    comment,
    BUTANE.map((line, k) => {
      const [symbol, x, y, z] = line.split(/\s+/);
      return k === BUTANE.length - 1 ? `${symbol} ${(Number(x) + 0.02 * by).toFixed(4)} ${y} ${z}` : line;
    }),
  );
const file = (name: string, comments: readonly string[], from = 0): Sent => ({
  name,
  content: comments.map((comment, k) => butane(comment, from + k)).join(""),
});
const get = async (path: string) => {
  const response = await call(`/api/v1${path}`, { token });
  const text = await response.text();
  return { status: response.status, headers: response.headers, text, json: () => JSON.parse(text) };
};
const add = async (id: string, files: Sent[], fields: Record<string, string> = {}, to = "files") => {
  const body = formOf(files, fields);
  const response = await call(`/api/v1/ensembles/${id}/${to}`, { method: "POST", token, body });
  const answer = await response.json();
  if (response.status !== 201) throw new Error(`${response.status}: ${JSON.stringify(answer)}`);
  return answer;
};
const FIELDS = { level: "A", energyUnit: "kcal/mol" };
/** Keeps every frame. */
const ALL = { level: "A", rmsdTolerance: 0, energyTolerance: 0 };
const codes = (warnings: { code: string }[]) => warnings.map(({ code }) => code);
type Said = { code: string; frame?: number; message: string; severity: string };

describe("a batch on another scale of energy", () => {
  it("is told in the answer, in sifts and in populations", async () => {
    const first = await takenIn(token, [file("a.xyz", ["8.1 scale", "8.5", "9.0"])], FIELDS);
    const before = await sifted(token, first.id, ALL);
    expect((await get(`/sifts/${before.id}/populations`)).json().warnings).toEqual([]);
    const grown = await add(first.id, [file("e.xyz", ["E=-277.500000000 Eh", "E=-277.499000000 Eh"], 3)]);
    const said = grown.intake.messages.find(({ code }: Said) => code === "E12");
    expect(said).toMatchObject({ severity: "remark", file: "e.xyz" });
    expect(said.message).toContain("frames 4 to 5");
    expect(said.message).toContain("174,141 kcal/mol below");
    const asked = await (await post(token, `/ensembles/${first.id}/sifts`, ALL)).json();
    expect(codes(asked.warnings)).toEqual(["E12"]);
    const sift = await sifted(token, first.id, ALL);
    expect(codes((await get(`/sifts/${sift.id}`)).json().warnings)).toEqual(["E12"]);
    const populations = (await get(`/sifts/${sift.id}/populations`)).json();
    expect(codes(populations.warnings)).toEqual(["E12"]);
    expect(populations.warnings[0].message).toContain("span 174,143 kcal/mol");
    // The sift of the first upload stands as it was: its frames and energies are there still.
    const old = (await get(`/sifts/${before.id}/populations`)).json();
    expect(old.conformers).toHaveLength(3);
    expect(codes(old.warnings)).toEqual(["not-current", "E12"]);
  });

  it("is told again when the files are read again, and one frame by its number", async () => {
    const first = await takenIn(token, [file("a.xyz", ["1.1 lone", "1.2", "1.4", "1.3"])], FIELDS);
    const grown = await add(first.id, [file("e.xyz", ["-500 kcal/mol"], 4)]);
    const alone = grown.intake.messages.filter(({ code }: Said) => code === "E12");
    expect(alone).toMatchObject([{ frame: 5, file: "e.xyz" }]);
    expect(grown.intake.remarked).toBe(1);
    const again = await (await post(token, `/ensembles/${first.id}/reread`, FIELDS)).json();
    expect(again.intake.messages.filter(({ code }: Said) => code === "E12")).toMatchObject([{ frame: 5 }]);
  });
});

describe("a sift made before its data changed", () => {
  const made = async (tag: string) => {
    const taken = await takenIn(token, [file("a.xyz", [`0.0 ${tag}`, "0.5", "1.0", "2.0"])], FIELDS);
    return { id: taken.id, sift: (await sifted(token, taken.id, ALL)).id };
  };
  const paths = ["populations", "export.xyz", "export.sdf", "export.csv", "export.json", "averages.csv"];

  it("is refused once its energies have another unit, and stands again when they are back", async () => {
    const { id, sift } = await made("unit");
    const before = await get(`/sifts/${sift}/export.xyz`);
    expect(before.status).toBe(200);
    expect(before.headers.get("x-not-current")).toBeNull();
    await post(token, `/ensembles/${id}/reread`, { level: "A", energyUnit: "hartree" });
    for (const path of paths) {
      const refused = await get(`/sifts/${sift}/${path}`);
      expect([path, refused.status]).toEqual([path, 409]);
      expect(refused.json().detail).toContain("Sift again");
    }
    const shown = (await get(`/sifts/${sift}`)).json();
    expect(shown).toMatchObject({ current: false, warnings: [{ code: "not-current" }] });
    expect(shown.result.kept).toHaveLength(4);
    await post(token, `/ensembles/${id}/reread`, FIELDS);
    expect((await get(`/sifts/${sift}/export.xyz`)).text).toBe(before.text);
  });

  it("is refused once a table replaced its energies, or the level went", async () => {
    const { id, sift } = await made("replaced");
    const table = { name: "t.csv", content: "frame,A [kcal/mol]\n1,3\n2,0\n3,1\n4,9\n" };
    await add(id, [table], { replace: "true" }, "columns");
    for (const path of paths) expect((await get(`/sifts/${sift}/${path}`)).status).toBe(409);
    const other = await made("renamed");
    await post(token, `/ensembles/${other.id}/reread`, { ...FIELDS, level: "B" });
    for (const path of paths) expect((await get(`/sifts/${other.sift}/${path}`)).status).toBe(409);
  });

  it("is refused once its coordinates are others", async () => {
    const { sift } = await made("coordinates");
    await db
      .update(sifts)
      .set({ geometrySha: Buffer.alloc(32, 1), inputSha: Buffer.alloc(32, 1) })
      .where(eq(sifts.id, sift));
    const refused = await get(`/sifts/${sift}/export.xyz`);
    expect(refused.status).toBe(409);
    expect(refused.json().detail).toContain("structures");
  });

  it("says after a hold which frame of its set is held, in every answer", async () => {
    const { id, sift } = await made("held");
    await post(token, `/ensembles/${id}/frames/3/hold`, { reason: "to see" });
    const populations = (await get(`/sifts/${sift}/populations`)).json();
    expect(populations.warnings).toMatchObject([{ code: "not-current" }]);
    expect(populations.warnings[0].message).toContain("Of its set, 3 is held now");
    const json = await get(`/sifts/${sift}/export.json`);
    expect(json.json()).toMatchObject({ current: false, warnings: [{ code: "not-current" }] });
    expect((await get(`/sifts/${sift}/export.csv`)).headers.get("x-not-current")).toContain("3 is held now");
    expect((await get(`/sifts/${sift}/export.xyz`)).text).toContain('not_current="Frames were held');
    expect((await get(`/sifts/${sift}/export.sdf`)).text).toContain("> <NOT_CURRENT>\nFrames were held");
    await post(token, `/ensembles/${id}/frames/3/release`, { reason: "seen" });
    expect((await get(`/sifts/${sift}/export.json`)).json()).not.toHaveProperty("current");
  });
});
