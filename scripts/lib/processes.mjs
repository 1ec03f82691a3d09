import { spawn } from "node:child_process";
import { accessSync, constants, mkdirSync, openSync, readFileSync } from "node:fs";
import { createServer } from "node:net";
import path from "node:path";

/** Something that the person at the terminal can act on: printed without a stack. */
export class StartError extends Error {}

const EXPECTED = new Set(["DomainError", "EnvError", "DatabaseSettingsError"]);

/** What a command prints of a failure: its words where it has some, everything where nobody expected it. */
export const inWords = (error) =>
  error instanceof StartError || EXPECTED.has(error.name) ? error.message : error;

export const ROOT = path.resolve(import.meta.dirname, "../..");

/** Full path of a program, or null. Looks where Debian keeps servers too. */
export function findProgram(name) {
  const folders = [...(process.env.PATH ?? "").split(":"), "/usr/sbin", "/usr/bin", "/sbin", "/bin"];
  for (const folder of folders) {
    const file = path.join(folder || ".", name);
    try {
      accessSync(file, constants.X_OK);
      return file;
    } catch {
      // Looked for in the next folder.
    }
  }
  return null;
}

const running = new Set();

/** Ends what `run` has started and not finished; for a stop in the middle of a start. */
export function endRunning() {
  for (const child of running) child.kill("SIGTERM");
}

/**
 * Runs a program to its end. With `log` its output goes to that file, and its last lines into the error.
 */
export function run(command, args, { log, env, cwd = ROOT, allowFailure = false } = {}) {
  let out = "inherit";
  if (log) {
    mkdirSync(path.dirname(log), { recursive: true });
    out = openSync(log, "w");
  }
  return new Promise((resolve, reject) => {
    const child = spawn(command, args, { cwd, env: env ?? process.env, stdio: ["inherit", out, out] });
    running.add(child);
    child.on("error", (error) => {
      running.delete(child);
      reject(new StartError(`${command} could not be run: ${error.message}`));
    });
    child.on("exit", (code, signal) => {
      running.delete(child);
      if (code === 0 || allowFailure) return resolve(code ?? 1);
      const tail = log ? `\n${heartOf(log)}\nAll of it: ${log}` : "";
      reject(new StartError(`${command} ${args.join(" ")} ended with ${signal ?? code}.${tail}`));
    });
  });
}

/** Where a log first speaks of an error, else its end. */
function heartOf(file) {
  const lines = readFileSync(file, "utf8").trimEnd().split("\n");
  const first = lines.findIndex((line) => /\berror\b|^E: |✗|could not/i.test(line));
  return (first < 0 ? lines.slice(-15) : lines.slice(first, first + 15)).join("\n");
}

export function tailOf(file, lines = 15) {
  try {
    return readFileSync(file, "utf8").trimEnd().split("\n").slice(-lines).join("\n");
  } catch {
    return "";
  }
}

/** Fields of /proc/PID/stat after the name; null for a process that is gone or only waits to be reaped. */
function processFields(pid) {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, "utf8");
    const fields = stat.slice(stat.lastIndexOf(")") + 2).split(" ");
    return fields[0] === "Z" || fields[0] === "X" ? null : fields;
  } catch {
    return null;
  }
}

export function isAlive(pid) {
  return processFields(pid) !== null;
}

/** Start time of a process in ticks: with the pid it names a process for good. */
export function startTicks(pid) {
  return processFields(pid)?.[19] ?? null;
}

export function commandLine(pid) {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, "utf8").split("\0");
  } catch {
    return [];
  }
}

export const pause = (ms) => new Promise((resolve) => setTimeout(resolve, ms));

/** A TCP port that nobody listens on right now. */
export function freePort(host = "127.0.0.1") {
  return new Promise((resolve, reject) => {
    const probe = createServer();
    probe.on("error", reject);
    probe.listen(0, host, () => {
      const { port } = probe.address();
      probe.close(() => resolve(port));
    });
  });
}

/** True where this port can be listened on. */
export function portIsFree(port, host) {
  return new Promise((resolve) => {
    const probe = createServer();
    probe.on("error", () => resolve(false));
    probe.listen(port, host, () => probe.close(() => resolve(true)));
  });
}
