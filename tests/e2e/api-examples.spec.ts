import { execFile } from "node:child_process";
import { copyFileSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { promisify } from "node:util";
import { expect, expectAccessible, hydrated, signUp, test } from "./base";

// The programs that the reference page gives people to copy, run as they stand there, against the running server.

const run = promisify(execFile);
const EXAMPLES = path.resolve("app/lib/api/examples");
const ENSEMBLE = path.resolve("fixtures/reference/ensembles/difluoroethane.xyz");

let folder = "";
test.beforeEach(() => {
  folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-examples-"));
});
test.afterEach(() => rmSync(folder, { recursive: true, force: true }));

/** Makes a token by the page, as a person would in a team of their own, and keeps it in a file as the page says. */
async function makeToken(page: Parameters<typeof signUp>[0], name: string): Promise<string> {
  await signUp(page, "Ada Quist", `t${Math.random().toString(36).slice(2, 10)}@lab.example`);
  await page.goto(`${page.url()}/tokens`);
  await hydrated(page);
  await page.getByLabel("What it is for").fill(name);
  await page.getByText("All that you may").click();
  await page.getByRole("button", { name: "Make token" }).click();
  const token = await page.getByLabel("Token", { exact: true }).inputValue();
  writeFileSync(path.join(folder, "token.txt"), `Authorization: Bearer ${token}\n`, { mode: 0o600 });
  return token;
}

/** Five frames of the reference, shifted so that the bytes differ from file to file. */
function someFrames(file: number): string {
  const lines = readFileSync(ENSEMBLE, "utf8").split("\n").slice(0, 50);
  return `${lines.join("\n")}\n`.replaceAll(/^(-?\d+\.\d+)$/gm, (energy) => `${energy}${file}`);
}

/** The shell's program on some files; its lines, and what it came to. */
async function push(baseURL: string, series: string, files: string[]) {
  const words = ["push-ensembles.sh", "token.txt", series, "MMFF94", "kcal/mol", ...files];
  copyFileSync(path.join(EXAMPLES, "push-ensembles.sh"), path.join(folder, "push-ensembles.sh"));
  const env = { ...process.env, LOWLYING: baseURL };
  const done = await run("sh", words, { cwd: folder, env }).then(
    ({ stdout, stderr }) => ({ code: 0, stdout, stderr }),
    (error: { code: number; stdout: string; stderr: string }) => error,
  );
  const lines = done.stdout.trim().split("\n");
  return {
    code: done.code,
    stderr: done.stderr,
    rows: lines.map((line) => JSON.parse(line) as { file: string; status: number; id: string }),
  };
}

test("the batch job sends files, and sent again nothing doubles", async ({ page, request, baseURL }) => {
  const token = await makeToken(page, "Batch job");
  const files = Array.from({ length: 12 }, (_, n) => `run-${n}.xyz`);
  for (const [n, name] of files.entries()) writeFileSync(path.join(folder, name), someFrames(n + 1));
  const first = await push(baseURL ?? "", "Night run", files);
  expect(first.rows.map(({ file, status }) => [file, status])).toEqual(files.map((file) => [file, 201]));
  expect(first.code).toBe(0);
  const again = await push(baseURL ?? "", "Night run", files);
  expect(again.rows.map(({ status }) => status)).toEqual(files.map(() => 200));
  expect(again.rows.map(({ id }) => id)).toEqual(first.rows.map(({ id }) => id));
  const headers = { authorization: `Bearer ${token}` };
  const list = await request.get("/api/v1/ensembles?series=Night%20run", { headers });
  expect((await list.json()) as { total: number }).toMatchObject({ total: files.length });
});

test("the batch job says what was refused and goes on", async ({ page, baseURL }) => {
  await makeToken(page, "Batch job with a bad file");
  writeFileSync(path.join(folder, "bad.xyz"), "not a structure\n");
  writeFileSync(path.join(folder, "good.xyz"), someFrames(7));
  const done = await push(baseURL ?? "", "Night run", ["bad.xyz", "good.xyz"]);
  expect(done.code).toBe(1);
  expect(done.rows.map(({ status }) => status)).toEqual([422, 201]);
  expect(done.stderr).toContain("line 1 should hold the atom count");
});

test("the Python program prints populations that the page shows", async ({ page, baseURL }) => {
  const token = await makeToken(page, "Notebook");
  copyFileSync(ENSEMBLE, path.join(folder, "difluoroethane.xyz"));
  const { rows } = await push(baseURL ?? "", "Notebook", ["difluoroethane.xyz"]);
  const env = { ...process.env, LOWLYING: baseURL ?? "", LOWLYING_TOKEN: token };
  const program = path.join(EXAMPLES, "read_populations.py");
  const { stdout } = await run("python3", [program, rows[0]?.id ?? "", "MMFF94", "298.15"], { env });
  const lines = stdout.trim().split("\n");
  expect(lines).toHaveLength(2);
  const shares = lines.map((line) => Number(/([\d.]+) %$/.exec(line)?.[1]));
  expect(shares[0] ?? 0).toBeGreaterThan(shares[1] ?? 100);
  expect((shares[0] ?? 0) + (shares[1] ?? 0)).toBeCloseTo(100, 1);
  await page.goto(`/ensembles/${rows[0]?.id}/populations`);
  await expect(page.getByText(`${shares[0]?.toFixed(1)}`).first()).toBeVisible();
});

test("the reference page shows every call and is accessible", async ({ page, request }) => {
  await page.goto("/api");
  const document = (await (await request.get("/api/v1/openapi.json")).json()) as {
    paths: Record<string, object>;
  };
  for (const address of Object.keys(document.paths)) {
    await expect(page.getByRole("heading", { name: address }).first()).toBeAttached();
  }
  await expectAccessible(page);
});
