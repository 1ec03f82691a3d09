import { gzipSync } from "node:zlib";
import { desc, eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { logbook } from "~/db/schema.server";
import { type EnsembleAnswer, ensembleSchema, populationsSchema } from "~/lib/api/schemas";
import { withEnv } from "../factories/environment";
import { tokenOf } from "../factories/people";
import { BUTANE, frame, makeLab, post, sifted, takenIn, upload, withJobs } from "../factories/upload";
import { call } from "../setup/app";

let runner: Awaited<ReturnType<typeof withJobs>>;
let lab: Awaited<ReturnType<typeof makeLab>>;
let token: string;
beforeAll(async () => {
  runner = await withJobs();
  lab = await makeLab();
  ({ token } = lab);
});
afterAll(() => runner.stop());

const fields = { level: "A", energyUnit: "kcal/mol" };
const PROPERTIES = "Properties=species:S:1:pos:R:3";

/** Frames with these comments; `tag` makes the bytes of every test its own. */
const file = (tag: string, comments: readonly string[]) => [
  { name: `${tag}.xyz`, content: comments.map((comment) => frame(`${comment} name=${tag}`)).join("") },
];
const file2 = (tag: string, energies: readonly string[]) =>
  file(
    tag,
    energies.map((energy) => `energy=${energy}`),
  );

const get = async (path: string) => (await call(`/api/v1${path}`, { token })).json();

describe("the same files again", () => {
  const two = ["energy=-1.55 other=-2.55", "energy=-1.45 other=-2.45"];
  const open = (tag: string) => [
    {
      name: `${tag}.xyz`,
      content: two.map((comment, k) => frame(`${comment.replaceAll("other", "scf")} ${tag}${k}`)).join(""),
    },
  ];

  it("are the same ensemble with the answers as written, and with those in force", async () => {
    const files = open("answered");
    const first = await takenIn(token, files, fields);
    expect(first.intake.questions.map(({ id }) => id)).toEqual(["energy-from"]);
    const answers = [{ id: "energy-from", option: "key:energy" }];
    expect((await post(token, `/ensembles/${first.id}/answers`, { answers })).status).toBe(200);
    for (const again of [fields, { ...fields, energyFrom: "key:energy" }]) {
      const response = await upload(token, files, again);
      expect(response.status).toBe(200);
      expect((await response.json()).id).toBe(first.id);
    }
    const other = await upload(token, files, { ...fields, energyFrom: "key:scf" });
    expect(other.status).toBe(409);
    expect(await other.json()).toMatchObject({ existing: first.id, url: first.url });
  });

  it("say what they did not take up: kind, temperature, name and series", async () => {
    const files = file2("kept", ["-1.55", "-1.45"]);
    const first = await takenIn(token, files, fields);
    const response = await upload(token, files, {
      ...fields,
      energyKind: "free",
      energyTemperature: "310",
      name: "Another",
      series: "Elsewhere",
    });
    expect(response.status).toBe(200);
    const body = ensembleSchema.strict().parse(await response.json());
    expect(body.id).toBe(first.id);
    expect(body.levels).toMatchObject([{ energyKind: "electronic", temperature: null }]);
    const said = (body.warnings ?? []).map(({ message }) => message).join("\n");
    expect(said).toContain("energyKind=free was not taken up");
    expect(said).toContain("energyTemperature=310 was not taken up");
    expect(said).toContain(`/api/v1/ensembles/${first.id}/reread`);
    expect(said).toContain('it stays "kept"');
    expect(said).toContain('it stays in "Unsorted"');
    expect((await (await upload(token, files, fields)).json()).warnings).toBeUndefined();
  });

  it("tell a token for adding where they are only if it took them in itself", async () => {
    const add = await tokenOf(lab.analyst.id, lab.team.id, "add");
    const own = file2("of its own", ["-1.55", "-1.45"]);
    const first = await takenIn(add, own, fields);
    const conflict = await upload(add, own, { ...fields, level: "B" });
    expect(conflict.status).toBe(409);
    expect(await conflict.json()).toMatchObject({ existing: first.id, url: first.url });
    const others = file2("of somebody", ["-1.55", "-1.45"]);
    const foreign = await takenIn(token, others, fields);
    for (const more of [fields, { ...fields, level: "B" }]) {
      const refused = await upload(add, others, more);
      expect(refused.status).toBe(409);
      const text = await refused.text();
      expect(text).not.toContain(foreign.id);
      expect(text).not.toContain("existing");
    }
  });
});

describe("questions", () => {
  it("for a level say that any name will do, and take it", async () => {
    const comments = ["energy=-1.55 scf=-2.55", "energy=-1.45 scf=-2.45"];
    const taken = await takenIn(token, file("level", comments), { energyUnit: "kcal/mol" });
    const level = taken.intake.questions.find(({ id }) => id === "level");
    expect(level).toMatchObject({ options: [], text: expect.stringContaining("Any name will do") });
    const answers = [
      { id: "level", option: "My own method" },
      { id: "energy-from", option: "key:scf" },
    ];
    const answered = await post(token, `/ensembles/${taken.id}/answers`, { answers });
    expect(answered.status).toBe(200);
    expect((await answered.json()).intake.questions).toEqual([]);
    expect((await get(`/ensembles/${taken.id}`)).levels).toMatchObject([{ name: "My own method", count: 2 }]);
  });
});

it("a kind that was stated stays stated through the answers", async () => {
  const comments = ["energy=-1.55 scf=-2.55", "energy=-1.45 scf=-2.45"];
  const electronic = { ...fields, energyKind: "electronic" };
  const taken = await takenIn(token, file("stated", comments), electronic);
  const answers = [{ id: "energy-from", option: "key:scf" }];
  const answered = await (await post(token, `/ensembles/${taken.id}/answers`, { answers })).json();
  expect(answered.intake.messages.map(({ code }: { code: string }) => code)).not.toContain("E13");
});

describe("columns", () => {
  it("hold every number under its own name with unit and rule, and energies under levels too", async () => {
    const comments = ["-1.55", "-1.45", "-1.35"].map(
      (energy, k) =>
        `${PROPERTIES} energy=${energy} mu=${k === 1 ? "nan" : `${k}.5`} phi[deg]=${k}0.5 tool=x`,
    );
    const taken: EnsembleAnswer = await takenIn(token, file("columns", comments), {
      ...fields,
      level: "mu",
      energyFrom: "key:energy",
    });
    const { id } = taken.levels[0] ?? { id: "" };
    expect(taken.columns).toEqual([
      { id, name: "mu", kind: "energy", unit: "kcal/mol", rule: null, count: 3, missing: 0 },
      expect.objectContaining({
        name: "mu (2)",
        kind: "property",
        unit: null,
        rule: "linear",
        count: 2,
        missing: 1,
      }),
      expect.objectContaining({
        name: "phi[deg]",
        kind: "property",
        unit: "deg",
        rule: "circular",
        count: 3,
      }),
    ]);
    const codes = taken.intake.messages.map(({ code, frame: at }) => `${code}${at ? ` ${at}` : ""}`);
    expect(codes).toEqual(expect.arrayContaining(["C05", "C14", "C14 2"]));
    expect(taken.intake.remarked).toBe(1);
  });

  it("stop at their limit, which can be set", async () => {
    withEnv({ MAX_COLUMNS: 2 });
    const taken = await takenIn(
      token,
      file("many", ["a=1.5 b=2.5 c=3.5 d=4.5 energy=-1.55", "a=1.5 b=2.5 c=3.5 d=4.5 energy=-1.45"]),
      { ...fields, energyFrom: "key:energy" },
    );
    expect(taken.columns.map(({ name }) => name)).toEqual(["A", "a", "b"]);
    const limit = taken.intake.messages.filter(({ code }) => code === "G11");
    expect(limit).toHaveLength(1);
    expect(limit[0]?.message).toContain("“c” and “d”");
  });

  it("of energies that are no numbers stay empty there, with the text found", async () => {
    const taken = await takenIn(token, file2("comma", ["-1,234", "-1.45", "1e400", "-1.35"]), fields);
    expect(taken.levels).toMatchObject([{ count: 2, missing: 2 }]);
    expect(taken.intake).toMatchObject({ accepted: 4, remarked: 2, held: 0 });
    const told = taken.intake.messages.filter(({ code }) => code === "E10");
    expect(told.map(({ frame: at, found }) => [at, found])).toEqual([
      [1, "-1,234"],
      [3, "1e400"],
    ]);
    const sift = await sifted(token, taken.id, { level: "A", rmsdTolerance: 0 });
    expect(sift.result?.withoutEnergy).toEqual([1, 3]);
  });

  it("with two units beside their numbers are refused in the words of the file", async () => {
    const mixed = file("mixed", ["E = -1.55 kcal/mol", "E = -6.45 kJ/mol"]);
    const refused = await upload(token, mixed, { level: "A" });
    expect(refused.status).toBe(422);
    const body = await refused.json();
    expect(body.errors).toMatchObject([{ field: "energyUnit" }]);
    expect(body.detail).toContain("kcal/mol in 1 frame, kJ/mol in 1 frame");
    const taken = await takenIn(token, mixed, { ...fields, energyUnit: "kJ/mol" });
    expect(taken.levels).toMatchObject([{ unit: "kJ/mol", count: 1, missing: 1 }]);
    expect(taken.intake.messages).toContainEqual(expect.objectContaining({ code: "E06", frame: 1 }));
  });
});

describe("populations", () => {
  it("of free energies at another temperature than theirs carry a warning", async () => {
    const free = { ...fields, energyKind: "free", energyTemperature: "298.15" };
    const taken = await takenIn(token, file2("free", ["-1.55", "-1.25"]), free);
    const sift = await sifted(token, taken.id, { level: "A", rmsdTolerance: 0 });
    const at = async (temperature: string) =>
      populationsSchema.strict().parse(await get(`/sifts/${sift.id}/populations?temperature=${temperature}`));
    expect((await at("298.15")).warnings).toEqual([]);
    expect((await at("310")).warnings).toMatchObject([{ code: "E13" }]);
  });

  it("of free energies without a temperature do at any, and intake says so", async () => {
    const taken = await takenIn(token, file2("untempered", ["-1.55", "-1.25"]), {
      ...fields,
      energyKind: "free",
    });
    expect(taken.intake.messages).toContainEqual(
      expect.objectContaining({ code: "E13", message: expect.stringContaining("temperature is not stated") }),
    );
    const sift = await sifted(token, taken.id, { level: "A", rmsdTolerance: 0 });
    expect((await get(`/sifts/${sift.id}/populations`)).warnings).toMatchObject([{ code: "E13" }]);
  });
});

describe("sifts", () => {
  it("with a window of 0 keep the lowest and its equals, and any wait is taken", async () => {
    const taken = await takenIn(token, file2("window", ["-1.55", "-1.45", "-1.55"]), fields);
    const sift = await sifted(token, taken.id, { level: "A", window: 0, rmsdTolerance: 0 });
    expect(sift.recipe.window).toBe(0);
    expect(sift.result?.outsideWindow).toEqual([2]);
    expect((await call(`/api/v1/sifts/${sift.id}?wait=3600`, { token })).status).toBe(200);
    expect((await call(`/api/v1/sifts/${sift.id}?wait=-1`, { token })).status).toBe(422);
  });

  it("without energies say that a tolerance for them is not used", async () => {
    const taken = await takenIn(token, file2("order", ["-1.55", "-1.45"]), fields);
    const asked = await post(token, `/ensembles/${taken.id}/sifts`, { level: null, energyTolerance: 0.3 });
    expect(asked.status).toBe(202);
    const { id, warnings } = await asked.json();
    expect(warnings).toMatchObject([{ message: expect.stringContaining("energyTolerance 0.3 is not used") }]);
    expect((await get(`/sifts/${id}?wait=60`)).recipe.energyTolerance).toBeNull();
    const same = await post(token, `/ensembles/${taken.id}/sifts`, { level: null });
    expect(await same.json()).toMatchObject({ id, warnings: [] });
  });

  it("are handed over as JSON in kcal/mol, the source's number beside", async () => {
    const taken = await takenIn(token, file2("json", ["-4.184", "-2.092"]), {
      level: "A",
      energyUnit: "kJ/mol",
    });
    const sift = await sifted(token, taken.id, { level: "A", rmsdTolerance: 0 });
    const json = await get(`/sifts/${sift.id}/export.json`);
    expect(json.units).toMatchObject({ energy: "kcal/mol", sourceEnergy: "kJ/mol" });
    expect(json.conformers[0]).toMatchObject({
      frame: 1,
      energy: -1,
      sourceEnergy: -4.184,
      relativeEnergy: 0,
    });
  });
});

describe("requests", () => {
  it("with the file as text are told how to send it", async () => {
    const form = new FormData();
    form.append("file", "run3.xyz");
    const response = await call("/api/v1/ensembles", { method: "POST", token, body: form });
    expect(response.status).toBe(422);
    expect(await response.json()).toMatchObject({
      errors: [{ field: "file", message: expect.stringContaining('-F "file=@run3.xyz"') }],
    });
  });

  it("with an option of the address given twice are refused by its name", async () => {
    const answer = await call("/api/v1/ensembles?page=1&page=2&other=1&other=2", { token });
    expect(answer.status).toBe(422);
    const { errors } = await answer.json();
    expect(errors).toEqual([{ field: "page", message: expect.stringContaining("more than once") }]);
  });

  it("that are wrong hear nothing of the validator", async () => {
    const taken = await takenIn(token, file2("wrong", ["-1.55", "-1.45"]), fields);
    const sift = await sifted(token, taken.id, { level: "A" });
    const answers = await Promise.all([
      call(`/api/v1/sifts/${sift.id}/populations?temperature=warm&weights=x`, { token }),
      call(`/api/v1/sifts/${sift.id}?wait=x`, { token }),
      call("/api/v1/ensembles?page=0", { token }),
      post(token, `/ensembles/${taken.id}/sifts`, { window: "x", rmsdTolerance: -1 }),
      post(token, `/ensembles/${taken.id}/answers`, { answers: [{ id: "level" }] }),
      upload(token, file2("wrong unit", ["-1"]), { energyUnit: "furlong", level: "A" }),
    ]);
    for (const answer of answers) {
      expect(answer.status).toBe(422);
      const body = await answer.json();
      expect(body.errors.length).toBeGreaterThan(0);
      for (const { field, message } of body.errors) {
        expect(field).toBeTruthy();
        expect(message).not.toMatch(/invalid|undefined|received|\|/i);
        expect(message.length).toBeGreaterThan(15);
      }
    }
  });

  it("stand in the logbook with the address they came from", async () => {
    await takenIn(token, file2("origin", ["-1.55", "-1.45"]), fields);
    const [entry] = await db
      .select({ type: logbook.type, origin: logbook.origin })
      .from(logbook)
      .where(eq(logbook.teamId, lab.team.id))
      .orderBy(desc(logbook.id))
      .limit(1);
    expect(entry?.origin).toBe("192.0.2.1");
  });
});

describe("rates of a token", () => {
  it("of calls and of uploads can be set; beyond them 429 says when to come back", async () => {
    const own = await tokenOf(lab.analyst.id, lab.team.id);
    withEnv({ API_CALLS_PER_MINUTE: 6, API_UPLOADS_PER_MINUTE: 2 });
    const statuses: number[] = [];
    for (let k = 0; k < 3; k++) {
      statuses.push((await upload(own, file2(`rate ${k}`, ["-1.55", "-1.45"]), fields)).status);
    }
    expect(statuses).toEqual([201, 201, 429]);
    const list = () => call("/api/v1/ensembles", { token: own });
    const calls = [await list(), await list(), await list(), await list()];
    expect(calls.map(({ status }) => status)).toEqual([200, 200, 200, 429]);
    const refused = calls[3];
    expect(Number(refused?.headers.get("retry-after"))).toBeGreaterThan(0);
    expect(await refused?.json()).toMatchObject({
      status: 429,
      detail: expect.stringContaining("6 calls a minute"),
    });
    const other = await tokenOf(lab.analyst.id, lab.team.id);
    expect((await call("/api/v1/ensembles", { token: other })).status).toBe(200);
  });
});

describe("chirality", () => {
  /** A sulfur with three different neighbours, in their plane or above it. */
  const sulfur = (comment: string, height: number) =>
    frame(comment, [`S 0 0 ${height}`, "F 1.55 0 0", "Cl -1 1.73 0", "O -0.74 -1.28 0"]);

  it("is decided again when the lowest frame is held and released", async () => {
    const content = sulfur("energy=-2.55", 0.02) + sulfur("energy=-1.55", 0.5) + sulfur("energy=-1.45", 0.51);
    const taken = await takenIn(token, [{ name: "chiral.xyz", content }], fields);
    const chirality = async () => (await get(`/ensembles/${taken.id}`)).chirality;
    expect([taken.intake.held, await chirality()]).toEqual([0, "unsure"]);
    await post(token, `/ensembles/${taken.id}/frames/1/hold`, { reason: "flat" });
    expect(await chirality()).toBe("chiral");
    await post(token, `/ensembles/${taken.id}/frames/1/release`, { reason: "looked again" });
    expect(await chirality()).toBe("unsure");
  });
});

describe("containers and texts, through the upload", () => {
  const plain = frame("energy=-1.55 name=eins") + frame("energy=-1.45 name=zwei");
  const utf16 = (text: string, big: boolean) => {
    const bytes = Buffer.from(`\ufeff${text}`, "utf16le");
    return big ? bytes.swap16() : bytes;
  };

  it.each([
    ["UTF-8 with a mark", Buffer.from(`\ufeff${plain}`)],
    ["UTF-16, little end first", utf16(plain, false)],
    ["UTF-16, big end first", utf16(plain, true)],
    ["UTF-16 in gzip", gzipSync(utf16(plain.replace("eins", "one"), false))],
    ["CRLF", Buffer.from(plain.replaceAll("\n", "\r\n"))],
    ["lone CR, no end", Buffer.from(plain.replaceAll("\n", "\r").slice(0, -1))],
  ])("%s", async (_, content) => {
    const taken = await takenIn(token, [{ name: "text.xyz", content }], fields);
    expect(taken.intake).toMatchObject({ frames: 2, accepted: 2, remarked: 0 });
    expect(taken.levels).toMatchObject([{ count: 2 }]);
  });

  it("other bytes are read as Windows-1252, with a remark", async () => {
    const content = Buffer.from(plain.replace("eins", "\u00e9ins"), "latin1");
    const taken = await takenIn(token, [{ name: "legacy.xyz", content }], fields);
    expect(taken.intake).toMatchObject({ accepted: 2 });
    expect(taken.intake.messages).toContainEqual(
      expect.objectContaining({ code: "G03", severity: "remark" }),
    );
    const sift = await sifted(token, taken.id, { level: "A", rmsdTolerance: 0 });
    expect((await get(`/sifts/${sift.id}/export.json`)).conformers[0].label).toBe("\u00e9ins");
  });

  it("characters that steer a screen are shown escaped", async () => {
    const content = plain.replace("eins", "e\u202eins\u0007");
    const taken = await takenIn(token, [{ name: "steer\u202e.xyz", content }], fields);
    const told = taken.intake.messages.find(({ code }) => code === "G13");
    expect(told).toMatchObject({ frame: 1, found: "e\\u202eins\\u0007", file: "steer\\u202e.xyz" });
    expect(JSON.stringify(taken)).not.toContain("\u202e");
  });

  it("a typographic minus is a minus, digits of other scripts are none", async () => {
    const minus = BUTANE.map((line) => line.replace("-1.9480", "\u22121.9480"));
    const taken = await takenIn(
      token,
      [{ name: "minus.xyz", content: frame("energy=\u22121.55 m", [...minus]) + frame("energy=-1.45 m") }],
      fields,
    );
    expect(taken.levels).toMatchObject([{ count: 2 }]);
    expect(taken.intake.messages).toContainEqual(
      expect.objectContaining({ code: "G14", severity: "remark", frame: 1 }),
    );
    const arabic = BUTANE.map((line) => line.replace("0.5680", "\u0660.5680"));
    const held = await takenIn(
      token,
      [{ name: "digits.xyz", content: frame("energy=-1.55 d", [...arabic]) + frame("energy=-1.45 d") }],
      fields,
    );
    expect(held.intake).toMatchObject({ accepted: 1, held: 1 });
    expect(held.intake.messages).toContainEqual(
      expect.objectContaining({ code: "G14", severity: "hold", frame: 1 }),
    );
  });

  it("a file cut in its last line keeps the frames before", async () => {
    const content = plain.slice(0, -8);
    const taken = await takenIn(token, [{ name: "cut.xyz", content }], fields);
    expect(taken.intake).toMatchObject({ frames: 2, accepted: 1, held: 1 });
    expect(taken.intake.messages).toContainEqual(
      expect.objectContaining({ code: "X09", severity: "hold", frame: 2 }),
    );
  });

  it("an unperiodic pbc without a cell leaves nothing out, so nothing is said", async () => {
    const comment = (energy: string) => `${PROPERTIES} energy=${energy} pbc="F F F"`;
    const taken = await takenIn(token, file("pbc", [comment("-1.55"), comment("-1.45")]), {
      ...fields,
      energyKind: "electronic",
    });
    expect(taken.intake).toMatchObject({ accepted: 2, remarked: 0 });
    expect(taken.intake.messages).toEqual([]);
  });
});
