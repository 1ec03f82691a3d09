// A database as Debian's mariadb-dump writes it and mariadb reads it. Every row is a line, so that rows can be counted and
// hashed as they pass: the counts belong to the very moment of the dump.
import { spawn } from "node:child_process";
import { createHash } from "node:crypto";
import { Transform } from "node:stream";
import { pipeline } from "node:stream/promises";
import { findProgram, StartError } from "./processes.mjs";

const LOOPBACK = new Set(["127.0.0.1", "localhost", "::1"]);
const NEWLINE = 0x0a;
const ROW = 0x28;
/** Who made a trigger: left out, so that any user may load it. */
const DEFINER = /^(\/\*!\d+ CREATE\*\/) \/\*!\d+ DEFINER=\S+\*\/ /;

function connection(url) {
  const { hostname, port, username, password, pathname } = new URL(url);
  return {
    database: decodeURIComponent(pathname.slice(1)),
    arguments: [
      "--no-defaults",
      `--host=${hostname}`,
      `--port=${port || 3306}`,
      `--user=${decodeURIComponent(username)}`,
      "--default-character-set=utf8mb4",
      "--max-allowed-packet=1G",
      ...(LOOPBACK.has(hostname) ? ["--skip-ssl"] : []),
    ],
    // Not among the arguments, which every user of the machine can read.
    env: { ...process.env, MYSQL_PWD: decodeURIComponent(password) },
  };
}

/** Starts a program of MariaDB; `ended` throws what it said where it failed. */
function start(name, args, { env }, stdio) {
  const child = spawn(findProgram(name) ?? name, args, { env, stdio: [...stdio, "pipe"] });
  let said = "";
  child.stderr.on("data", (data) => {
    said = `${said}${data}`.slice(-2000);
  });
  const ended = new Promise((resolve, reject) => {
    child.on("error", (error) => reject(new StartError(`${name} could not be run: ${error.message}`)));
    child.on("close", (code) =>
      code === 0 ? resolve() : reject(new StartError(`${name} failed:\n${said.trim()}`)),
    );
  });
  return { child, ended };
}

/** Passes a dump on line by line, without the makers of triggers, and counts and hashes the rows of each table. */
function rowCounter() {
  const tables = new Map();
  let table = null;
  let parts = [];
  const take = (line) => {
    if (line[0] === ROW && table !== null) {
      table.rows += 1;
      // A row ends with a comma, or with a semicolon where the statement does: no difference between the rows.
      table.hash.update(line.subarray(0, -2)).update("\n");
      return line;
    }
    const text = line.toString("utf8");
    const name = /^INSERT INTO `([^`]+)`/.exec(text)?.[1];
    table = name === undefined ? null : (tables.get(name) ?? { rows: 0, hash: createHash("sha256") });
    if (table) tables.set(name, table);
    return DEFINER.test(text) ? Buffer.from(text.replace(DEFINER, "$1 ")) : line;
  };
  const stream = new Transform({
    transform(chunk, _encoding, done) {
      const lines = [];
      let from = 0;
      for (let end = chunk.indexOf(NEWLINE); end >= 0; end = chunk.indexOf(NEWLINE, from)) {
        parts.push(chunk.subarray(from, end + 1));
        lines.push(take(parts.length === 1 ? parts[0] : Buffer.concat(parts)));
        parts = [];
        from = end + 1;
      }
      if (from < chunk.length) parts.push(chunk.subarray(from));
      done(null, Buffer.concat(lines));
    },
    flush(done) {
      done(null, Buffer.concat(parts));
    },
  });
  const counted = () =>
    Object.fromEntries(
      [...tables].map(([name, { rows, hash }]) => [name, { rows, sha256: hash.copy().digest("hex") }]),
    );
  return { stream, counted };
}

/**
 * Dumps a database in one transaction, triggers included; whoever works in it is not held up.
 *
 * @param streams where the text goes
 * @returns rows and their checksum of each table that has any
 */
export async function dump(url, ...streams) {
  const to = connection(url);
  const what = ["--single-transaction", "--no-tablespaces", "--hex-blob", "--order-by-primary", "--triggers"];
  const { child, ended } = start("mariadb-dump", [...to.arguments, ...what, to.database], to, [
    "ignore",
    "pipe",
  ]);
  const { stream, counted } = rowCounter();
  await Promise.all([pipeline(child.stdout, stream, ...streams), ended]);
  return counted();
}

/** Loads the text of a dump into the database of an address. */
export async function load(url, ...streams) {
  const to = connection(url);
  const { child, ended } = start("mariadb", [...to.arguments, to.database], to, ["pipe", "ignore"]);
  // Where the program ends early its own words say why; the broken pipe does not.
  await Promise.all([pipeline(...streams, child.stdin).catch(() => {}), ended]);
}
