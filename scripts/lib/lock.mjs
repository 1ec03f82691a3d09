import { mkdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { pause, startTicks } from "./processes.mjs";

/** True for a lock whose maker is gone: it counts for nothing. */
function isStale(file) {
  try {
    const [pid, ticks] = readFileSync(file, "utf8").split(" ");
    return ticks !== undefined && startTicks(Number(pid)) !== ticks;
  } catch {
    return false;
  }
}

/** Runs work while no other process holds the lock of this file; waits as long as one does. */
export async function withLock(file, work) {
  mkdirSync(path.dirname(file), { recursive: true });
  for (;;) {
    try {
      writeFileSync(file, `${process.pid} ${startTicks(process.pid)}`, { flag: "wx" });
      break;
    } catch (error) {
      if (error.code !== "EEXIST") throw error;
      if (isStale(file)) rmSync(file, { force: true });
      else await pause(100);
    }
  }
  try {
    return await work();
  } finally {
    rmSync(file, { force: true });
  }
}
