import { mkdirSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";

const fileIn = (folder) => path.join(folder, "address");

/** Notes where the instance of a data folder is reached, for commands that print addresses. */
export function noteAddress(folder, origin) {
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  writeFileSync(fileIn(folder), `${origin}\n`, { mode: 0o600 });
}

/** Where the instance of a data folder was reached last: settings first, then what it noted, then the default. */
export function addressOf(folder) {
  if (process.env.APP_ORIGIN) return process.env.APP_ORIGIN.replace(/\/+$/, "");
  try {
    return readFileSync(fileIn(folder), "utf8").trim();
  } catch (error) {
    if (error.code !== "ENOENT") throw error;
    return `http://127.0.0.1:${process.env.PORT || 3000}`;
  }
}
