import { execFile } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { createServer } from "node:http";
import type { AddressInfo } from "node:net";
import os from "node:os";
import path from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";

// The program of the reference page against a server that answers now and then; tests/e2e runs it against the real one.

const PROGRAM = path.resolve(import.meta.dirname, "../app/lib/api/examples/push-ensembles.sh");

/** What a shell, curl or JSON could take for its own. */
const ODD_NAMES = ["a,b;type=x.xyz", 'quo"te\\.xyz', "-.xyz", "two words\tand a tab.xyz", "größe.xyz"];

let folder = "";
/** What is answered to the calls to come; the last one stays. */
let answers: { status: number; body: string; after?: string }[] = [];
let calls = 0;
/** Bodies that came, as text. */
let bodies: string[] = [];
const server = createServer((request, response) => {
  const pieces: Buffer[] = [];
  request.on("data", (piece: Buffer) => pieces.push(piece));
  request.on("end", () => {
    bodies.push(Buffer.concat(pieces).toString("utf8"));
    const answer = answers[Math.min(calls, answers.length - 1)];
    calls += 1;
    const head = answer?.after === undefined ? {} : { "retry-after": answer.after };
    response.writeHead(answer?.status ?? 500, head).end(answer?.body);
  });
});

beforeAll(async () => {
  folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-push-"));
  writeFileSync(path.join(folder, "token.txt"), "Authorization: Bearer lowl_none\n");
  for (const name of ["a.xyz", "b.xyz", ...ODD_NAMES])
    writeFileSync(path.join(folder, name), "1\n\nHe 0 0 0\n");
  await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
});
afterAll(async () => {
  await new Promise((resolve) => server.close(resolve));
  rmSync(folder, { recursive: true, force: true });
});

/** An answer as the application writes it: keys in its order, the rest left out. */
const taken = (intake: object, more = {}) =>
  JSON.stringify({ id: "aaaaaaaaaaaaaaaa", url: "x", intake, levels: [], ...more });
const CLEAN = { frames: 4, accepted: 4, remarked: 0, held: 0, messages: [], questions: [] };
const NOTHING = { frames: null, accepted: null, remarked: null, held: null, questions: null, warnings: null };

interface Row {
  file: string;
  status: number;
  id: string;
  outcome: string;
}

function push(port: number, files: string[], retries: string, { series = "Night", level = "MMFF94" } = {}) {
  const env = { ...process.env, LOWLYING: `http://127.0.0.1:${port}`, RETRIES: retries };
  const words = [PROGRAM, "token.txt", series, level, "kcal/mol", ...files];
  return new Promise<{ code: number; rows: Row[]; stderr: string }>((resolve) => {
    execFile("sh", words, { cwd: folder, env }, (error, stdout, stderr) => {
      const rows = stdout
        .split("\n")
        .filter(Boolean)
        .map((line) => JSON.parse(line) as Row);
      resolve({ code: typeof error?.code === "number" ? error.code : 0, rows, stderr });
    });
  });
}
const portOf = () => (server.address() as AddressInfo).port;

describe("the Python example", () => {
  const example = path.resolve(import.meta.dirname, "../app/lib/api/examples/read_populations.py");
  const read = (words: string[], token: string) =>
    new Promise<{ code: number; stderr: string }>((resolve) => {
      const env = { ...process.env, LOWLYING_TOKEN: token, LOWLYING: "http://127.0.0.1:1" };
      execFile("python3", [example, ...words], { env }, (error, _stdout, stderr) =>
        resolve({ code: Number(error?.code ?? 0), stderr }),
      );
    });

  it("says what its command lacks, and ends with 2", async () => {
    const short = await read(["aaaaaaaaaaaaaaaa", "MMFF94"], "lowl_none");
    expect(short.code).toBe(2);
    expect(short.stderr).toMatch(/^Say which ensemble, .* found 2\.\nusage: /);
    const nobody = await read(["aaaaaaaaaaaaaaaa", "MMFF94", "298.15"], "");
    expect(nobody.code).toBe(2);
    expect(nobody.stderr).toMatch(/^Put the token into LOWLYING_TOKEN\.\nusage: /);
    // Complete, it asks: nobody listens there.
    expect((await read(["aaaaaaaaaaaaaaaa", "MMFF94", "298.15"], "lowl_none")).code).toBe(4);
  });
});

describe("the program that sends ensembles", () => {
  it("tries again where it is asked to wait, and counts one answer a file", async () => {
    calls = 0;
    answers = [
      { status: 503, body: "{}", after: "0" },
      { status: 429, body: "{}", after: "0" },
      { status: 201, body: taken(CLEAN) },
    ];
    const done = await push(portOf(), ["a.xyz"], "3");
    expect(done).toMatchObject({ code: 0, stderr: "" });
    const counts = { frames: 4, accepted: 4, remarked: 0, held: 0, questions: 0, warnings: 0 };
    expect(done.rows).toEqual([
      { file: "a.xyz", status: 201, id: "aaaaaaaaaaaaaaaa", outcome: "taken", ...counts },
    ]);
    expect(calls).toBe(3);
  });

  it("gives no file the answer of the one before, and says that nobody answered", async () => {
    calls = 0;
    answers = [{ status: 201, body: taken(CLEAN) }];
    const missing = await push(portOf(), ["a.xyz", "gone.xyz", "b.xyz"], "0");
    expect(missing.code).toBe(1);
    expect(missing.rows).toMatchObject([
      { file: "a.xyz", status: 201, id: "aaaaaaaaaaaaaaaa" },
      { file: "gone.xyz", status: 0, id: "", outcome: "refused", ...NOTHING },
      { file: "b.xyz", status: 201, id: "aaaaaaaaaaaaaaaa" },
    ]);
    expect(missing.stderr).toContain("gone.xyz: not sent.");
    // Nothing listens on port 1.
    const away = await push(1, ["a.xyz"], "0");
    expect(away).toMatchObject({ code: 4, rows: [{ file: "a.xyz", status: 0, id: "", outcome: "unsent" }] });
  });

  it("sends every file, series and level as they are called, and prints JSON of every name", async () => {
    calls = 0;
    bodies = [];
    answers = [{ status: 201, body: taken(CLEAN) }];
    const series = '@night; "two", <three>';
    const done = await push(portOf(), ODD_NAMES, "0", { series, level: "B3LYP;def2-SVP" });
    expect(done).toMatchObject({ code: 0, stderr: "" });
    expect(done.rows.map(({ file }) => file)).toEqual(ODD_NAMES);
    expect(bodies).toHaveLength(ODD_NAMES.length);
    for (const body of bodies) {
      expect(body).toContain(`\r\n\r\n${series}\r\n`);
      expect(body).toContain("\r\n\r\nB3LYP;def2-SVP\r\n");
      expect(body).toContain("He 0 0 0");
    }
    // No level, no field of it: an empty one would be a name.
    await push(portOf(), ["a.xyz"], "0", { level: "" });
    expect(bodies.at(-1)).not.toContain('name="level"');
  });

  it("tells by line and exit code what is taken, remarked, waits, is refused and could not be sent", async () => {
    const options = [{ id: "eV", text: "eV" }];
    const question = { id: "energy-unit", code: "E03", text: 'In "options":["?', options };
    const warnings = [{ code: "G13", message: "m" }];
    const message = { severity: "remark", code: "E10", message: '"held":3,' };
    const cases: [number, string, string, number, object][] = [
      [200, taken({ ...CLEAN, remarked: 1, messages: [message] }), "remarked", 0, { remarked: 1, held: 0 }],
      [201, taken(CLEAN, { warnings }), "remarked", 0, { warnings: 1 }],
      [201, taken({ ...CLEAN, accepted: 3, held: 1 }), "waiting", 3, { accepted: 3, held: 1, questions: 0 }],
      [201, taken({ ...CLEAN, questions: [question, question] }), "waiting", 3, { questions: 2 }],
      [422, '{"detail":"no"}', "refused", 1, NOTHING],
      [401, '{"detail":"no"}', "refused", 1, NOTHING],
      [503, '{"detail":"later"}', "unsent", 4, NOTHING],
    ];
    for (const [status, body, outcome, code, counts] of cases) {
      calls = 0;
      answers = [{ status, body, after: "0" }];
      const done = await push(portOf(), ["a.xyz"], "0");
      expect(done.rows, outcome).toMatchObject([{ status, outcome, ...counts }]);
      expect(done.code, outcome).toBe(code);
      if (status > 400) expect(done.stderr).toContain('"detail"');
    }
    expect((await push(portOf(), [], "0")).code).toBe(2);
  });
});
