import { randomBytes, randomInt } from "node:crypto";
import { mkdirSync, readFileSync, renameSync, writeFileSync } from "node:fs";
import path from "node:path";

/** Without letters and figures that look alike; for a password that people copy from a terminal. */
const READABLE = "abcdefghjkmnpqrstuvwxyz23456789";

function readablePassword() {
  const group = () => Array.from({ length: 4 }, () => READABLE[randomInt(READABLE.length)]).join("");
  return [group(), group(), group(), group()].join("-");
}

/**
 * Secrets of this folder's instance, made once and kept with its data: they are the same at the next start. They count
 * on loopback only; production gets its secrets from the environment.
 */
export function localSecrets(folder) {
  const file = path.join(folder, "secrets.json");
  let known = {};
  try {
    known = JSON.parse(readFileSync(file, "utf8"));
  } catch (error) {
    if (error.code !== "ENOENT") throw error;
  }
  const secrets = {
    sessionSecret: known.sessionSecret ?? randomBytes(32).toString("base64url"),
    demoPassword: known.demoPassword ?? readablePassword(),
  };
  if (known.sessionSecret && known.demoPassword) return secrets;
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  writeFileSync(`${file}.new`, `${JSON.stringify(secrets, null, 2)}\n`, { mode: 0o600 });
  renameSync(`${file}.new`, file);
  return secrets;
}
