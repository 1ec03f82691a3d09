// The server that the browser tests talk to: `npm start` itself, on a throw-away database and with its own build, data
// folder and demo password, so that an instance that runs beside it is left alone.
import { mkdtempSync, readdirSync, rmSync, statSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { openThrowaway } from "./database.mjs";
import { TEST_FOLDER } from "./lib/build.mjs";

/** Printed nowhere else, real nowhere: the demo accounts of this server live as long as the run. */
const DEMO_PASSWORD = "walk-through-the-house";

const folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-e2e-"));
const database = process.env.TEST_DATABASE_URL ? null : await openThrowaway(console.error);

Object.assign(process.env, {
  NODE_ENV: "production",
  BUILD_FOLDER: TEST_FOLDER,
  DATA_DIRECTORY: folder,
  DATABASE_URL: process.env.TEST_DATABASE_URL ?? database.url,
  DATABASE_MIGRATION_URL: process.env.TEST_DATABASE_OWNER_URL ?? database?.ownerUrl ?? "",
  DATABASE_DURABILITY: "relaxed",
  ARGON2_MEMORY_KIB: "1024",
  DEMO_PASSWORD,
  OPEN_SIGN_UP: "1",
  SMTP_URL: "",
  APP_ORIGIN: `http://127.0.0.1:${process.env.PORT}`,
  HOST: "127.0.0.1",
});

// Logs of earlier runs: kept for an hour, for whoever looks into a failure.
for (const name of readdirSync(TEST_FOLDER).filter((one) => /^server-\d+\.log$/.test(one))) {
  const log = path.join(TEST_FOLDER, name);
  if (Date.now() - statSync(log).mtimeMs > 3_600_000) rmSync(log, { force: true });
}

process.on("exit", () => rmSync(folder, { recursive: true, force: true }));
const { start } = await import("./lib/start-server.mjs");
await start({ afterStop: () => database?.close() });
