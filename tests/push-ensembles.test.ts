import { execFile } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { createServer } from "node:http";
import type { AddressInfo } from "node:net";
import os from "node:os";
import path from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";

// The program of the reference page against a server that answers now and then; tests/e2e runs it against the real one.

const PROGRAM = path.resolve(import.meta.dirname, "../app/lib/api/examples/push-ensembles.sh");

let folder = "";
/** What is answered to the calls to come; the last one stays. */
let answers: { status: number; body: string; after?: string }[] = [];
let calls = 0;
const server = createServer((request, response) => {
  request.resume().on("end", () => {
    const answer = answers[Math.min(calls, answers.length - 1)];
    calls += 1;
    const head = answer?.after === undefined ? {} : { "retry-after": answer.after };
    response.writeHead(answer?.status ?? 500, head).end(answer?.body);
  });
});

beforeAll(async () => {
  folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-push-"));
  writeFileSync(path.join(folder, "token.txt"), "Authorization: Bearer lowl_none\n");
  for (const name of ["a.xyz", "b.xyz"]) writeFileSync(path.join(folder, name), "1\n\nHe 0 0 0\n");
  await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
});
afterAll(async () => {
  await new Promise((resolve) => server.close(resolve));
  rmSync(folder, { recursive: true, force: true });
});

function push(port: number, files: string[], retries: string) {
  const env = { ...process.env, LOWLYING: `http://127.0.0.1:${port}`, RETRIES: retries };
  const words = [PROGRAM, "token.txt", "Night", "MMFF94", "kcal/mol", ...files];
  return new Promise<{ code: number; rows: unknown[]; stderr: string }>((resolve) => {
    execFile("sh", words, { cwd: folder, env }, (error, stdout, stderr) => {
      const rows = stdout
        .trim()
        .split("\n")
        .map((line) => JSON.parse(line) as unknown);
      resolve({ code: typeof error?.code === "number" ? error.code : 0, rows, stderr });
    });
  });
}
const portOf = () => (server.address() as AddressInfo).port;

describe("the program that sends ensembles", () => {
  it("tries again where it is asked to wait, and counts one answer a file", async () => {
    calls = 0;
    answers = [
      { status: 503, body: "{}", after: "0" },
      { status: 429, body: "{}", after: "0" },
      { status: 201, body: '{"id":"aaaaaaaaaaaaaaaa","url":"x"}' },
    ];
    const done = await push(portOf(), ["a.xyz"], "3");
    expect(done).toMatchObject({ code: 0, stderr: "" });
    expect(done.rows).toEqual([{ file: "a.xyz", status: 201, id: "aaaaaaaaaaaaaaaa" }]);
    expect(calls).toBe(3);
  });

  it("gives no file the answer of the one before, and says that nobody answered", async () => {
    calls = 0;
    answers = [{ status: 201, body: '{"id":"aaaaaaaaaaaaaaaa","url":"x"}' }];
    const missing = await push(portOf(), ["a.xyz", "gone.xyz", "b.xyz"], "0");
    expect(missing.code).toBe(1);
    expect(missing.rows).toEqual([
      { file: "a.xyz", status: 201, id: "aaaaaaaaaaaaaaaa" },
      { file: "gone.xyz", status: 0, id: "" },
      { file: "b.xyz", status: 201, id: "aaaaaaaaaaaaaaaa" },
    ]);
    expect(missing.stderr).toContain("gone.xyz: not sent.");
    // Nothing listens on port 1.
    const away = await push(1, ["a.xyz"], "0");
    expect(away).toMatchObject({ code: 1, rows: [{ file: "a.xyz", status: 0, id: "" }] });
  });
});
