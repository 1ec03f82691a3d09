import { execFile } from "node:child_process";
import { existsSync } from "node:fs";
import path from "node:path";
import { promisify } from "node:util";
import { openDatabase } from "../database.mjs";
import { needProgram } from "./debian.mjs";
import { needPackages } from "./packages.mjs";
import { portIsFree, ROOT, StartError } from "./processes.mjs";
import { localSecrets } from "./secrets.mjs";

const runFile = promisify(execFile);
const [major, minor] = process.versions.node.split(".").map(Number);

/** Settings from `.env`, where there is one; the environment itself wins. */
export function loadSettings() {
  if (major < 20 || (major === 20 && minor < 15)) {
    throw new StartError(`Node.js 20.15 or later is needed; this is ${process.versions.node}.`);
  }
  process.chdir(ROOT);
  const file = path.join(ROOT, ".env");
  if (existsSync(file)) process.loadEnvFile(file);
}

/** The words for a port that somebody listens on. */
export function portTaken(port, host) {
  return new StartError(
    `Port ${port} on ${host} is taken, perhaps by another Lowlying. Stop that, or choose another port: PORT=${port + 1} npm start`,
  );
}

/** Refuses a taken port before anything is done for it. */
export async function needPort() {
  const port = Number(process.env.PORT || 3000);
  const host = process.env.HOST || "127.0.0.1";
  const valid = Number.isInteger(port) && port > 0 && port < 65536;
  if (valid && !(await portIsFree(port, host))) throw portTaken(port, host);
}

export function dataFolder() {
  return path.resolve(ROOT, process.env.DATA_DIRECTORY || ".data");
}

/**
 * Checks the settings with the application's own rules, before anything is installed, started or built for them.
 * Secrets that a loopback instance keeps itself are filled in.
 */
async function checkSettings() {
  process.env.DATA_DIRECTORY = dataFolder();
  const { stdout } = await runFile(process.execPath, [path.join(import.meta.dirname, "check-settings.mjs")]);
  const { fault, loopback } = JSON.parse(stdout);
  if (fault) throw new StartError(fault);
  if (!loopback) return;
  const secrets = localSecrets(dataFolder());
  process.env.SESSION_SECRET ||= secrets.sessionSecret;
  process.env.DEMO_PASSWORD ||= secrets.demoPassword;
}

/**
 * Everything that the application stands on: packages, settings, database.
 *
 * @returns the database, or null where DATABASE_URL names one of somebody else's
 */
export async function prepare(say) {
  const own = !process.env.DATABASE_URL;
  // Side by side, since both wait for the network.
  await Promise.all([needPackages(say), own ? needProgram("mariadbd", "mariadb-server", say) : null]);
  await checkSettings();
  if (!own) return null;
  const database = await openDatabase({ folder: dataFolder(), say });
  process.env.DATABASE_URL = database.url;
  process.env.DATABASE_MIGRATION_URL = database.ownerUrl;
  return database;
}
