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
