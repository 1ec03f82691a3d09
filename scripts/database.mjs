// Starts and stops a MariaDB server of our own: loopback only, data in a folder, no settings of the machine.
//   node scripts/database.mjs start | stop | url     the server of .data or DATA_DIRECTORY (what `npm start` uses)
//   node scripts/database.mjs throwaway              one for a while: prints its address, ends with Ctrl-C
import {
  chmodSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import os from "node:os";
import path from "node:path";
import { needProgram } from "./lib/debian.mjs";
import { withLock } from "./lib/lock.mjs";
import {
  endServer,
  greets,
  ownerUrlOf,
  placesIn,
  readState,
  serverPid,
  startServer,
  urlOf,
} from "./lib/mariadb.mjs";
import { ROOT, StartError, startTicks } from "./lib/processes.mjs";

const LOOK_MS = 5_000;
const MISSED_LOOKS = 3;

/** Processes that use the server of this folder; notes of ended ones are swept. */
function livingUses(places) {
  const living = [];
  for (const name of existsSync(places.uses) ? readdirSync(places.uses) : []) {
    const [pid, ticks] = name.split("-");
    if (startTicks(Number(pid)) === ticks) living.push(name);
    else rmSync(path.join(places.uses, name), { force: true });
  }
  return living;
}

/** The server that runs in a folder; null where none does, or one of an older version that nobody uses any more. */
async function runningServer(places) {
  const known = serverPid(places) === null ? null : readState(places);
  if (!known || !(await greets(known.port))) return null;
  if (known.ownerPassword || livingUses(places).length > 0) return known;
  // It knows one account for everything; started again it has two.
  await endServer(places);
  return null;
}

/**
 * Opens the database of a folder: installs, makes, starts what is missing, or joins the server that runs there.
 *
 * @returns its address for the application, the one of the account that owns the tables, and `close`, which ends the
 *   server unless another process uses it
 */
export async function openDatabase({
  folder = path.join(ROOT, ".data"),
  durable = true,
  broad = false,
  say = () => {},
} = {}) {
  await needProgram("mariadbd", "mariadb-server", say);
  const places = placesIn(path.resolve(folder));
  const use = path.join(places.uses, `${process.pid}-${startTicks(process.pid)}`);
  mkdirSync(places.folder, { recursive: true, mode: 0o700 });
  const state = await withLock(places.lock, async () => {
    const current = (await runningServer(places)) ?? (await startServer(places, { durable, broad }));
    mkdirSync(places.uses, { recursive: true });
    writeFileSync(use, "");
    return current;
  });
  return {
    url: urlOf(state),
    ownerUrl: ownerUrlOf(state),
    /** Starts the server again when it has been gone for a while, on the port that the application knows. */
    keepAlive(log) {
      let missed = 0;
      let busy = false;
      const look = async () => {
        if (busy) return;
        missed = serverPid(places) === null ? missed + 1 : 0;
        if (missed < MISSED_LOOKS) return;
        busy = true;
        try {
          log.warn("the database has gone; starting it again");
          await withLock(places.lock, async () => {
            if (serverPid(places) === null) await startServer(places, { durable, broad });
          });
        } catch (error) {
          log.error({ err: error }, "the database could not be started again");
        }
        busy = false;
      };
      const watch = setInterval(look, LOOK_MS);
      watch.unref();
      return watch;
    },
    async close() {
      await withLock(places.lock, async () => {
        rmSync(use, { force: true });
        if (livingUses(places).length === 0) await endServer(places);
      });
    },
  };
}

/** Address of the server that runs in a folder, for the application, or null. Starts nothing. */
export function runningUrl(folder = path.join(ROOT, ".data")) {
  const places = placesIn(path.resolve(folder));
  const state = serverPid(places) === null ? null : readState(places);
  return state ? urlOf(state) : null;
}

/** Ends servers whose run was killed before it could: they would stay in memory for good. */
async function sweepThrowaways(memory) {
  for (const name of readdirSync(memory).filter((one) => /^lowlying-[A-Za-z0-9]{6}$/.test(one))) {
    const places = placesIn(path.join(memory, name));
    try {
      // A young one may be about to note its use.
      const young = Date.now() - statSync(places.state).mtimeMs < 60_000;
      if (young || livingUses(places).length > 0) continue;
      await endServer(places);
      rmSync(places.folder, { recursive: true, force: true });
    } catch {
      // Somebody else's, or just being made.
    }
  }
}

/** A server for tests, in memory where the machine has room there; gone with its data at the end. */
export async function openThrowaway(say) {
  const memory = existsSync("/dev/shm") ? "/dev/shm" : os.tmpdir();
  await sweepThrowaways(memory);
  const folder = mkdtempSync(path.join(memory, "lowlying-"));
  chmodSync(folder, 0o755);
  const database = await openDatabase({ folder, durable: false, broad: true, say });
  return {
    url: database.url,
    ownerUrl: database.ownerUrl,
    async close() {
      await database.close();
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

async function main(act) {
  // Here, since that module needs this one.
  const { dataFolder, loadSettings } = await import("./lib/prepare.mjs");
  loadSettings();
  const folder = dataFolder();
  if (act === "start") {
    // The note of use ends with this command; the server stays until `stop`, or until an instance that joined it ends.
    const database = await openDatabase({ folder, say: console.error });
    console.log(database.url);
    return;
  }
  if (act === "stop") {
    const places = placesIn(folder);
    const others = livingUses(places);
    if (others.length > 0)
      throw new StartError(`Still used by process ${others.map((one) => one.split("-")[0]).join(", ")}.`);
    return endServer(places);
  }
  if (act === "url") {
    const url = runningUrl(folder);
    if (!url)
      throw new StartError(`No database runs in ${folder}. Start one with: node scripts/database.mjs start`);
    console.log(url);
    return;
  }
  if (act === "throwaway") {
    const database = await openThrowaway(console.error);
    console.log(database.url);
    await new Promise((resolve) => {
      for (const signal of ["SIGINT", "SIGTERM"]) process.on(signal, resolve);
      // Signals alone do not keep a process alive.
      setInterval(() => {}, 1 << 30);
    });
    await database.close();
    process.exit(0);
  }
  throw new StartError("Say one of: start, stop, url, throwaway.");
}

if (process.argv[1] === import.meta.filename) {
  main(process.argv[2]).catch((error) => {
    console.error(error instanceof StartError ? error.message : error);
    process.exit(1);
  });
}
