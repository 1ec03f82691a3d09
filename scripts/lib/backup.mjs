// Backup of a database into a folder, and its way back into an empty one.
import { createHash } from "node:crypto";
import {
  createReadStream,
  createWriteStream,
  existsSync,
  mkdirSync,
  readFileSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import path from "node:path";
import { PassThrough, Writable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { createGunzip, createGzip } from "node:zlib";
import { createConnection } from "mysql2/promise";
import { needProgram } from "./debian.mjs";
import { dump, load } from "./dump.mjs";
import { StartError } from "./processes.mjs";

const placesIn = (folder) => ({
  dump: path.join(folder, "lowlying.sql.gz"),
  list: path.join(folder, "backup.json"),
});

/** Coordinates and original files are packed already: a higher level costs time and gives little. */
const LEVEL = 1;

function hashing() {
  const hash = createHash("sha256");
  const stream = new PassThrough();
  stream.on("data", (data) => hash.update(data));
  return { stream, digest: () => hash.digest("hex") };
}

const nowhere = () => new Writable({ write: (_data, _encoding, done) => done() });

const rowsOf = (tables) => Object.values(tables).reduce((sum, { rows }) => sum + rows, 0);

/** An account that may not read triggers cannot save those that keep the logbook and the editions. */
async function needTriggers(url) {
  const connection = await createConnection({ uri: url, connectTimeout: 5_000 });
  try {
    const [tables] = await connection.query("show tables like 'logbook'");
    if (tables.length > 0) await connection.query("show create trigger logbook_never_updated");
  } catch (error) {
    if (!/TRG_DOES_NOT_EXIST|ACCESS_?DENIED/.test(error.code)) throw error;
    throw new StartError(
      "This database account does not see the triggers that keep the logbook, so they would be missing from the backup. Give the address of the account that owns the tables in DATABASE_MIGRATION_URL.",
    );
  } finally {
    await connection.end();
  }
}

/**
 * Writes a whole database into a folder: everything that the product keeps, as it stood at one moment. It may be in use.
 *
 * @returns what was written: tables with rows and checksums, checksum and bytes of the file
 */
export async function backUp({ url, folder, version, say = () => {} }) {
  await needProgram("mariadb-dump", "mariadb-client", say);
  const places = placesIn(folder);
  if (existsSync(places.dump) || existsSync(places.list)) {
    throw new StartError(`${folder} holds a backup already. Name another folder.`);
  }
  await needTriggers(url);
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  const part = `${places.dump}.part`;
  const hash = hashing();
  const made = new Date().toISOString();
  try {
    const file = createWriteStream(part, { mode: 0o600 });
    const tables = await dump(url, createGzip({ level: LEVEL }), hash.stream, file);
    if (rowsOf(tables) === 0) throw new StartError("There is nothing in this database to back up.");
    const list = { product: "Lowlying", version, made, sha256: hash.digest(), tables };
    renameSync(part, places.dump);
    writeFileSync(places.list, `${JSON.stringify(list, null, 2)}\n`, { mode: 0o600 });
    return { ...list, rows: rowsOf(tables), bytes: statSync(places.dump).size };
  } finally {
    rmSync(part, { force: true });
  }
}

/** The list of a backup, once its file has proved to be the one that was written. */
async function needBackup(folder) {
  const places = placesIn(folder);
  if (!existsSync(places.dump) || !existsSync(places.list)) {
    throw new StartError(`${folder} holds no backup: lowlying.sql.gz and backup.json make one.`);
  }
  const list = JSON.parse(readFileSync(places.list, "utf8"));
  const hash = hashing();
  await pipeline(createReadStream(places.dump), hash.stream, nowhere());
  if (hash.digest() !== list.sha256) {
    throw new StartError(`${places.dump} is not the file that was written then: its checksum differs.`);
  }
  return { list, file: places.dump };
}

async function needEmpty(url) {
  const connection = await createConnection({ uri: url, connectTimeout: 5_000 });
  try {
    const [rows] = await connection.query(
      "select count(*) as n from information_schema.tables where table_schema = database()",
    );
    if (rows[0].n === 0) return;
    throw new StartError(
      `The database is not empty: it holds ${rows[0].n} tables. A backup goes back into an empty one, in another folder or at another DATABASE_URL.`,
    );
  } finally {
    await connection.end();
  }
}

/**
 * Loads a backup into an empty database, then dumps that and compares every table's rows with those of the backup.
 *
 * @throws StartError where the file was changed, the database is not empty, or a table came back otherwise
 */
export async function restore({ url, folder, say = () => {} }) {
  await needProgram("mariadb", "mariadb-client", say);
  const { list, file } = await needBackup(folder);
  await needEmpty(url);
  await load(url, createReadStream(file), createGunzip());
  const found = await dump(url, nowhere());
  const names = [...new Set([...Object.keys(list.tables), ...Object.keys(found)])];
  const other = names.filter((name) => found[name]?.sha256 !== list.tables[name]?.sha256);
  if (other.length > 0) {
    throw new StartError(
      `These tables came back otherwise than they were saved: ${other.join(", ")}. Do not use this database.`,
    );
  }
  return { ...list, rows: rowsOf(found) };
}
