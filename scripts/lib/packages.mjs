import { createHash } from "node:crypto";
import { existsSync, lstatSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { ROOT, run } from "./processes.mjs";

const FOLDER = path.join(ROOT, "node_modules");
const STAMP = path.join(FOLDER, ".lowlying-lock");

/**
 * Installs the packages of the lock file unless they are in. Development packages too, whatever NODE_ENV says: the
 * build needs them.
 */
export async function needPackages(say) {
  const wanted = createHash("sha256")
    .update(readFileSync(path.join(ROOT, "package-lock.json")))
    .digest("hex");
  const have = existsSync(STAMP) ? readFileSync(STAMP, "utf8") : null;
  if (have === wanted) return;
  // Packages that somebody installed by hand carry no stamp of ours, or an old one, but the record of npm.
  if (installedByNpm()) return writeFileSync(STAMP, wanted);
  // npm empties the folder first: behind a link that is the folder of another checkout.
  if (lstatSync(FOLDER, { throwIfNoEntry: false })?.isSymbolicLink())
    throw new Error(
      "node_modules is a link to packages of another lock file: remove the link, then start again.",
    );
  say("Installing the packages of package-lock.json");
  await run("npm", ["ci", "--include=dev", "--no-audit", "--no-fund"], {
    log: path.join(ROOT, ".data/log/npm-ci.log"),
  });
  writeFileSync(STAMP, wanted);
}

/** True where npm's own record of what is in node_modules names the versions that the lock file wants. */
function installedByNpm() {
  const record = path.join(ROOT, "node_modules/.package-lock.json");
  if (!existsSync(record)) return false;
  const installed = JSON.parse(readFileSync(record, "utf8")).packages;
  const wanted = JSON.parse(readFileSync(path.join(ROOT, "package-lock.json"), "utf8")).packages;
  return Object.entries(wanted).every(
    ([name, { version, optional }]) => name === "" || optional || installed[name]?.version === version,
  );
}
