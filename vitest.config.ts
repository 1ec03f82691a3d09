import os from "node:os";
import { fileURLToPath } from "node:url";
import { defineConfig } from "vitest/config";

/** Settings of every test process; the database is filled in by tests/setup/database.ts. */
const env = {
  NODE_ENV: "test",
  DATABASE_URL: "mysql://nobody@127.0.0.1:1/none",
  DATABASE_MIGRATION_URL: "",
  DATABASE_DURABILITY: "relaxed",
  APP_ORIGIN: "http://127.0.0.1:3000",
  SESSION_SECRET: "a key of the tests that signs nothing real",
  ARGON2_MEMORY_KIB: "1024",
  LOG_LEVEL: process.env.TEST_LOG_LEVEL ?? "silent",
  OPEN_SIGN_UP: "",
  SMTP_URL: "",
  TRUST_PROXY: "",
  // Apart from what a running application has loaded.
  WORKER_DIRECTORY: ".worker/tests",
};

export default defineConfig({
  resolve: { alias: { "~": fileURLToPath(new URL("./app", import.meta.url)) } },
  test: {
    env,
    pool: "forks",
    // Left alone a machine of two cores would run one file at a time; much of integration waits for the database.
    maxWorkers: Math.max(2, os.availableParallelism()),
    restoreMocks: true,
    // For machines with other work: nothing here tells time.
    testTimeout: 30_000,
    hookTimeout: 60_000,
    projects: [
      {
        extends: true,
        test: {
          name: "unit",
          include: ["app/**/*.test.{ts,tsx}", "tests/*.test.ts"],
          setupFiles: ["tests/setup/console.ts"],
          // Files share what they import, which costs more than most of them take to run; none keeps state in a module.
          isolate: false,
        },
      },
      {
        extends: true,
        test: {
          name: "integration",
          include: ["tests/integration/**/*.test.{ts,tsx}"],
          globalSetup: ["tests/setup/server.ts"],
          setupFiles: ["tests/setup/console.ts", "tests/setup/database.ts"],
        },
      },
    ],
  },
});
