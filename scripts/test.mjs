// `npm test`: types, lint, unit, property, integration and browser tests, on a database, a build and ports of its own.
// Ends with one line that sums all runners; the exit code says the same.
import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { openThrowaway } from "./database.mjs";
import { buildPlaces, needBuild, TEST_FOLDER } from "./lib/build.mjs";
import { preferProgram } from "./lib/debian.mjs";
import { needPackages } from "./lib/packages.mjs";
import { loadSettings } from "./lib/prepare.mjs";
import { endRunning, freePort, ROOT, run, StartError } from "./lib/processes.mjs";

const say = (text) => console.log(`\n== ${text}`);
const program = (...parts) => path.join(ROOT, "node_modules", ...parts);

const state = { database: null, folder: null, stopped: false };
const sum = { passed: 0, failed: 0, skipped: 0 };
const skips = [];

function count(result) {
  for (const key of Object.keys(sum)) sum[key] += result[key] ?? 0;
}

/** A check without cases of its own counts as one. */
async function check(name, script, args, env) {
  say(name);
  const code = await run(process.execPath, [script, ...args], { env, allowFailure: true });
  count(code === 0 ? { passed: 1 } : { failed: 1 });
}

async function checkSources(env) {
  await check("Types: routes", program("@react-router/dev/bin.js"), ["typegen"], env);
  await check("Types", program("typescript/bin/tsc"), ["--noEmit"], env);
  await check("Lint and format", program("@biomejs/biome/bin/biome"), ["check", "."], env);
}

function readReport(file) {
  try {
    return JSON.parse(readFileSync(file, "utf8"));
  } catch {
    return null;
  }
}

/** A runner that ended badly without a failed case (it crashed, or a file did not load) has failed once. */
function settle(result, code) {
  if (code !== 0 && !(result.failed > 0)) count({ ...result, failed: 1 });
  else count(result);
}

async function runVitest(env) {
  say("Unit, property and integration tests");
  const file = path.join(state.folder, "vitest.json");
  const args = ["run", "--reporter=default", "--reporter=json", `--outputFile.json=${file}`];
  const code = await run(process.execPath, [program("vitest/vitest.mjs"), ...args], {
    env,
    allowFailure: true,
  });
  const report = readReport(file);
  const skipped = (report?.numPendingTests ?? 0) + (report?.numTodoTests ?? 0);
  for (const { name, assertionResults } of report?.testResults ?? []) {
    const left = assertionResults.filter(({ status }) => status !== "passed" && status !== "failed").length;
    if (left > 0) skips.push(`${path.relative(ROOT, name)}: ${left}`);
  }
  settle({ passed: report?.numPassedTests, failed: report?.numFailedTests, skipped }, code);
}

async function runPlaywright(env) {
  say("Browser tests");
  const file = path.join(state.folder, "playwright.json");
  const code = await run(process.execPath, [program("@playwright/test/cli.js"), "test"], {
    env: { ...env, E2E_REPORT: file, E2E_PORT: String(await freePort()) },
    allowFailure: true,
  });
  const stats = readReport(file)?.stats ?? {};
  const { expected, unexpected, flaky = 0, skipped } = stats;
  if (skipped > 0) skips.push(`browser tests: ${skipped}`);
  // What passes only at the second try has failed once.
  settle({ passed: expected, failed: (unexpected ?? 0) + flaky, skipped }, code);
}

async function clean() {
  await state.database?.close();
  state.database = null;
  if (state.folder) rmSync(state.folder, { recursive: true, force: true });
}

async function main() {
  loadSettings();
  await needPackages(say);
  const env = { ...process.env, CI: process.env.CI ?? "1" };
  // Settings of a real instance must not reach its tests.
  const foreign = ["DATABASE_URL", "DATABASE_MIGRATION_URL", "APP_ORIGIN", "SESSION_SECRET", "PORT"];
  for (const key of [...foreign, "SMTP_URL", "NODE_ENV"]) delete env[key];
  state.folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-test-"));
  // Packages first, one at a time: what follows needs them, and none of it the whole machine.
  const headless = ["chromium-headless-shell", "chromium-headless-shell"];
  const chromium = await preferProgram(headless, ["chromium", "chromium"], say);
  say("Starting a throw-away database");
  state.database = await openThrowaway(say);

  const places = buildPlaces(TEST_FOLDER);
  // Side by side: each keeps little more than one core busy.
  const [checked, built] = await Promise.allSettled([checkSources(env), needBuild(places, say)]);
  for (const { reason } of [checked, built]) if (reason) throw reason;
  Object.assign(env, {
    TEST_DATABASE_URL: state.database.url,
    TEST_DATABASE_OWNER_URL: state.database.ownerUrl,
    WORKER_DIRECTORY: places.worker,
    CHROMIUM: chromium,
  });
  await runVitest(env);
  await runPlaywright(env);
}

async function stop() {
  if (state.stopped) return;
  state.stopped = true;
  endRunning();
  await clean();
  process.exit(130);
}
for (const signal of ["SIGINT", "SIGTERM"]) process.on(signal, stop);

try {
  await main();
} catch (error) {
  if (!state.stopped) console.error(error instanceof StartError ? error.message : error);
  count({ failed: 1 });
}
if (!state.stopped) {
  await clean();
  if (sum.skipped > 0) console.log(`\n${sum.skipped} skipped (${skips.join("; ")})`);
  console.log(`\n${sum.passed} passed, ${sum.failed} failed`);
  process.exit(sum.failed === 0 && sum.passed > 0 ? 0 : 1);
}
