import { existsSync, readdirSync, unlinkSync, writeFileSync } from "node:fs";
import path from "node:path";
import { findProgram, ROOT, run, StartError } from "./processes.mjs";

const POLICY = "/usr/sbin/policy-rc.d";

function asRoot(command, args) {
  if (process.getuid?.() === 0) return [command, args];
  if (findProgram("sudo")) return ["sudo", [command, ...args]];
  throw new StartError(
    `Debian packages are missing and this user may not install them. As root run: ${command} ${args.join(" ")}`,
  );
}

function hasPackageLists() {
  try {
    return readdirSync("/var/lib/apt/lists").some(
      (name) => name.endsWith("_Packages") || name.includes("_Packages."),
    );
  } catch {
    return false;
  }
}

/** Keeps Debian from starting a database of the whole machine beside ours; only root can write the file. */
async function withoutServices(work) {
  const ours = process.getuid?.() === 0 && !existsSync(POLICY);
  if (ours) writeFileSync(POLICY, "#!/bin/sh\nexit 101\n", { mode: 0o755 });
  try {
    await work();
  } finally {
    if (ours) unlinkSync(POLICY);
  }
}

/**
 * Installs a Debian package unless the program it brings is there.
 *
 * @returns full path of the program
 */
export async function needProgram(program, packageName, say) {
  const found = findProgram(program);
  if (found) return found;
  if (!findProgram("apt-get")) {
    throw new StartError(
      `${program} is missing and there is no apt-get here. Install ${packageName} and start again.`,
    );
  }
  say(`Installing Debian's ${packageName} (about half a minute)`);
  const apt = async (...args) => {
    const [command, rest] = asRoot("env", [
      "DEBIAN_FRONTEND=noninteractive",
      "apt-get",
      "-o",
      "DPkg::Lock::Timeout=900",
      ...args,
    ]);
    await run(command, rest, { log: path.join(ROOT, ".data/log", `apt-${packageName}.log`) });
  };
  const install = () => apt("install", "-y", "--no-install-recommends", packageName);
  await withoutServices(async () => {
    if (!hasPackageLists()) await apt("update");
    try {
      await install();
    } catch {
      // Lists older than the archive name files that are gone.
      await apt("update");
      await install();
    }
  });
  const installed = findProgram(program);
  if (!installed) throw new StartError(`${packageName} was installed, but ${program} is still missing.`);
  return installed;
}

/**
 * The better of two programs that do the same, each with its package. Where the second is there already the first is
 * fetched only if the archive answers soon: a machine without a network must not wait for it.
 *
 * @returns full path of the program
 */
export async function preferProgram(better, other, say) {
  const found = findProgram(better[0]);
  if (found) return found;
  const ready = findProgram(other[0]);
  if (ready) return (findProgram("apt-get") && (await fetchSoon(...better, say))) || ready;
  try {
    return await needProgram(...better, say);
  } catch (error) {
    say(error.message.split("\n", 1)[0]);
    return needProgram(...other, say);
  }
}

/** Full path of the program once its package is installed, or null where that took too long or could not be. */
async function fetchSoon(program, packageName, say) {
  say(`Installing Debian's ${packageName} (about a quarter of a minute)`);
  const log = path.join(ROOT, ".data/log", `apt-${packageName}.log`);
  const apt = (...args) => {
    const impatient = ["-o", "Acquire::http::Timeout=10", "-o", "Acquire::Retries=0"];
    return ["env", "DEBIAN_FRONTEND=noninteractive", "apt-get", ...impatient, ...args];
  };
  const install = ["install", "-y", "--no-install-recommends", packageName];
  const soon = async (...args) => {
    const [command, rest] = asRoot("timeout", ["60", ...apt(...args)]);
    return (await run(command, rest, { log, allowFailure: true })) === 0;
  };
  try {
    // Only fetching is cut short, never the work of dpkg.
    const fetched =
      (await soon(...install, "--download-only")) ||
      ((await soon("update")) && (await soon(...install, "--download-only")));
    if (fetched) {
      const [command, rest] = asRoot("env", apt(...install, "--no-download").slice(1));
      await run(command, rest, { log });
    }
  } catch (error) {
    say(error.message.split("\n", 1)[0]);
  }
  return findProgram(program);
}
