import { existsSync } from "node:fs";
import { defineConfig, devices } from "@playwright/test";

// The server of a run gets its port once; worker processes read the configuration again and must find the same.
process.env.E2E_PORT ||= String(20_000 + Math.floor(Math.random() * 20_000));
// The log of the server, for the test that looks through it.
process.env.E2E_LOG ||= `.test/server-${process.env.E2E_PORT}.log`;
/** The headless build draws the same pages for half the work; what else there is serves as well. */
const BROWSERS = ["/usr/bin/chromium-headless-shell", "/usr/bin/chromium"];
const baseURL = `http://127.0.0.1:${process.env.E2E_PORT}`;

export default defineConfig({
  testDir: "tests/e2e",
  outputDir: "test-results",
  fullyParallel: true,
  forbidOnly: true,
  retries: 0,
  workers: process.env.E2E_WORKERS ? Number(process.env.E2E_WORKERS) : 2,
  timeout: 60_000,
  expect: { timeout: 10_000 },
  reporter: process.env.E2E_REPORT ? [["list"], ["json", { outputFile: process.env.E2E_REPORT }]] : "list",
  use: {
    baseURL,
    ...devices["Desktop Chrome"],
    viewport: { width: 1440, height: 900 },
    browserName: "chromium",
    screenshot: "only-on-failure",
    // A trace records every step of every test, a tenth of the whole run: E2E_TRACE=retain-on-failure where it is wanted.
    trace: process.env.E2E_TRACE === "retain-on-failure" ? "retain-on-failure" : "off",
    launchOptions: {
      executablePath: process.env.CHROMIUM || BROWSERS.find((file) => existsSync(file)),
      args: [
        "--no-sandbox",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        "--disable-quic",
        "--no-first-run",
      ],
    },
  },
  projects: [
    { name: "browser", testIgnore: "log.spec.ts" },
    // After all others: it looks through what the server wrote down about them.
    { name: "log", testMatch: "log.spec.ts", dependencies: ["browser"] },
  ],
  webServer: {
    // The same start as a person's, on a throw-away database.
    command: "mkdir -p .test && exec node scripts/e2e-server.mjs > $E2E_LOG",
    url: `${baseURL}/readyz`,
    timeout: 180_000,
    gracefulShutdown: { signal: "SIGTERM", timeout: 30_000 },
    stderr: "pipe",
    env: { ...stringsOf(process.env), PORT: process.env.E2E_PORT },
  },
});

function stringsOf(env: NodeJS.ProcessEnv): Record<string, string> {
  return Object.fromEntries(
    Object.entries(env).flatMap(([key, value]) => (value === undefined ? [] : [[key, value]])),
  );
}
