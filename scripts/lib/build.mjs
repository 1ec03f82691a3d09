import { createHash } from "node:crypto";
import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { withLock } from "./lock.mjs";
import { ROOT, run } from "./processes.mjs";

const SOURCES = ["app", "assembly", "public"];
const SETTINGS = [
  "package-lock.json",
  "react-router.config.ts",
  "vite.config.ts",
  "tsconfig.json",
  "scripts/build-kernel.mjs",
  "scripts/build-worker.mjs",
  "scripts/lib/build.mjs",
];

/** Checksum of everything that the build is made of, tests left out. */
function sourceHash() {
  const hash = createHash("sha256").update(process.version);
  const files = [...SETTINGS];
  for (const folder of SOURCES) {
    for (const entry of readdirSync(path.join(ROOT, folder), { recursive: true, withFileTypes: true })) {
      if (!entry.isFile() || /\.test\.tsx?$/.test(entry.name)) continue;
      files.push(path.relative(ROOT, path.join(entry.parentPath ?? entry.path, entry.name)));
    }
  }
  for (const file of files.sort()) {
    if (!existsSync(path.join(ROOT, file))) continue;
    hash.update(`\0${file}\0`).update(readFileSync(path.join(ROOT, file)));
  }
  return hash.digest("hex");
}

/** Where the tests keep theirs. */
export const TEST_FOLDER = ".test";

/** Folders of a build; the tests have theirs, so that they never pull a running server's files from under it. */
export function buildPlaces(folder = "") {
  return {
    build: path.join(ROOT, folder, "build"),
    worker: path.join(ROOT, folder, ".worker"),
    lock: path.join(ROOT, ".data/run", `building${folder}`),
  };
}

/** Builds the application and its computing thread unless the sources are those of the last build. */
export function needBuild(places, say) {
  return withLock(places.lock, () => buildIfNeeded(places, say));
}

async function buildIfNeeded(places, say) {
  const stamp = path.join(places.build, ".sources");
  const wanted = sourceHash();
  if (existsSync(stamp) && existsSync(places.worker) && readFileSync(stamp, "utf8") === wanted) return;
  say("Building the application");
  rmSync(stamp, { force: true });
  const env = {
    ...process.env,
    NODE_ENV: "production",
    BUILD_DIRECTORY: path.relative(ROOT, places.build),
    WORKER_DIRECTORY: places.worker,
  };
  const log = (name) => path.join(ROOT, ".data/log", `${name}.log`);
  const router = path.join(ROOT, "node_modules/@react-router/dev/bin.js");
  await run(process.execPath, [router, "build"], { env, log: log("build") });
  await run(process.execPath, [path.join(ROOT, "scripts/build-worker.mjs")], {
    env,
    log: log("build-worker"),
  });
  mkdirSync(places.build, { recursive: true });
  // Last: a build that was cut short must not pass for a whole one.
  writeFileSync(stamp, wanted);
}
