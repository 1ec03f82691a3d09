import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { readMigrationFiles } from "drizzle-orm/migrator";
import type { Connection, RowDataPacket } from "mysql2/promise";
import { env } from "../env.server.ts";
import { connectAsOwner, pool } from "./client.server.ts";
import { driverCode } from "./driver-errors.server.ts";
import { ownTriggers } from "./rights.server.ts";

/** The server keeps data in a way that the application does not accept; says what to set. */
export class DatabaseSettingsError extends Error {
  override name = "DatabaseSettingsError";
}

interface Settings {
  flush: number | string;
  doublewrite: number | string;
  mode: string;
  charset: string;
  collation: string;
  packet: number | string;
  version: string;
}

const isOn = (value: number | string) => Number(value) === 1 || value === "ON";

/**
 * What is wrong with a server's settings for data that must survive a power cut; empty when nothing is.
 *
 * @example settingsFaults({ ...good, flush: 2 }) // ["innodb_flush_log_at_trx_commit is 2, it must be 1"]
 */
export function settingsFaults(found: Settings, durability: "full" | "relaxed"): string[] {
  const faults: string[] = [];
  if (durability === "full") {
    if (Number(found.flush) !== 1) {
      faults.push(`innodb_flush_log_at_trx_commit is ${found.flush}, it must be 1`);
    }
    if (!isOn(found.doublewrite)) faults.push(`innodb_doublewrite is ${found.doublewrite}, it must be on`);
  }
  if (!/STRICT_(TRANS|ALL)_TABLES/.test(found.mode)) {
    faults.push(`sql_mode is "${found.mode}", it must hold STRICT_TRANS_TABLES`);
  }
  if (found.charset !== "utf8mb4") {
    faults.push(`the database's character set is ${found.charset}, it must be utf8mb4`);
  }
  if (Number(found.packet) < 8 * 2 ** 20) {
    faults.push(`max_allowed_packet is ${found.packet}, it must be at least 8388608 (8 MiB)`);
  }
  return faults;
}

async function readSettings(connection: Connection): Promise<Settings> {
  const [rows] = await connection.query<(RowDataPacket & Settings)[]>(
    `select @@global.innodb_flush_log_at_trx_commit as flush, @@global.innodb_doublewrite as doublewrite,
      @@global.sql_mode as mode, @@character_set_database as charset, @@collation_database as collation,
      @@global.max_allowed_packet as packet, version() as version`,
  );
  const row = rows[0];
  if (row === undefined) throw new DatabaseSettingsError("The database server told none of its settings.");
  return row;
}

/** Names and texts compare byte for byte; a database made with another collation is set so while it is empty. */
async function compareByByte(connection: Connection, found: Settings): Promise<void> {
  if (found.collation === "utf8mb4_bin") return;
  const [rows] = await connection.query<RowDataPacket[]>(
    "select 1 from information_schema.tables where table_schema = database() limit 1",
  );
  if (rows.length === 0) await connection.query("alter database character set utf8mb4 collate utf8mb4_bin");
}

/** A connection, or why there is none, without the address: a password stands in it. */
async function connect(): Promise<Connection> {
  try {
    return await connectAsOwner();
  } catch (error) {
    const setting = env().DATABASE_MIGRATION_URL === undefined ? "DATABASE_URL" : "DATABASE_MIGRATION_URL";
    throw new DatabaseSettingsError(
      `The database of ${setting} cannot be used (${driverCode(error) ?? "no answer"}). Is it running, and are its address, name and password right?`,
      { cause: error },
    );
  }
}

async function withLock<Result>(work: (connection: Connection) => Promise<Result>): Promise<Result> {
  const connection = await connect();
  try {
    const [rows] = await connection.query<RowDataPacket[]>(
      "select get_lock(concat(database(), '.migrate'), 60) as held",
    );
    if (rows[0]?.held !== 1) {
      throw new Error("Another process has been changing the database's tables for a minute. Start again.");
    }
    try {
      return await work(connection);
    } finally {
      await connection.query("select release_lock(concat(database(), '.migrate'))");
    }
  } finally {
    await connection.end();
  }
}

/** What a statement says that was carried out before, by a run that was cut short behind it. */
const ALREADY = new Set([
  "ER_TABLE_EXISTS_ERROR",
  "ER_DUP_FIELDNAME",
  "ER_DUP_KEYNAME",
  "ER_DUP_KEY",
  "ER_CANT_DROP_FIELD_OR_KEY",
  "ER_CANT_CREATE_TABLE",
]);

async function readStep(connection: Connection, migration: number) {
  await connection.query("insert ignore into __migration_steps values (?, 0, 0)", [migration]);
  const [rows] = await connection.query<RowDataPacket[]>(
    "select done, failed from __migration_steps where migration = ?",
    [migration],
  );
  return { done: Number(rows[0]?.done ?? 0), failed: Number(rows[0]?.failed ?? 0) === 1 };
}

async function runStep(connection: Connection, migration: number, sql: string, mayBeDone: boolean) {
  try {
    await connection.query(sql);
  } catch (error) {
    if (!mayBeDone || !ALREADY.has(driverCode(error) ?? "")) {
      // Noted, so that the next run does not take this refusal for work that was done.
      await connection.query("update __migration_steps set failed = 1 where migration = ?", [migration]);
      throw error;
    }
  }
  await connection.query("update __migration_steps set done = done + 1, failed = 0 where migration = ?", [
    migration,
  ]);
}

/** Time stamps of the migrations that are in. */
async function finishedMigrations(connection: Connection): Promise<Set<number>> {
  const [tables] = await connection.query<RowDataPacket[]>("show tables like '\\_\\_drizzle\\_migrations'");
  if (tables.length === 0) return new Set();
  const [rows] = await connection.query<RowDataPacket[]>("select created_at from __drizzle_migrations");
  return new Set(rows.map((row) => Number(row.created_at)));
}

/** Where what has been done is noted. */
async function makeNotes(connection: Connection): Promise<void> {
  try {
    await connection.query(
      "create table if not exists __drizzle_migrations (id serial primary key, hash text not null, created_at bigint)",
    );
    await connection.query(
      "create table if not exists __migration_steps (migration bigint primary key, done int not null, failed tinyint not null)",
    );
  } catch (error) {
    if (driverCode(error) !== "ER_TABLEACCESS_DENIED_ERROR") throw error;
    throw new DatabaseSettingsError(
      "This version changes the database's tables, and the account of DATABASE_URL may not. Give the address of the account that owns them in DATABASE_MIGRATION_URL.",
      { cause: error },
    );
  }
}

/**
 * Runs what is not in yet, a statement at a time. MariaDB commits every change of a table by itself, so the number of
 * statements done is kept beside it: a run that was cut short goes on where it stopped, and only the one statement whose
 * record may be missing is allowed to find its work done.
 */
async function runMigrations(connection: Connection): Promise<void> {
  const folder = path.resolve(env().MIGRATIONS_DIRECTORY);
  const finished = await finishedMigrations(connection);
  const open = readMigrationFiles({ migrationsFolder: folder }).filter(
    ({ folderMillis }) => !finished.has(folderMillis),
  );
  if (open.length === 0) return;
  await makeNotes(connection);
  for (const { folderMillis, hash, sql } of open) {
    const { done, failed } = await readStep(connection, folderMillis);
    for (const [step, statement] of sql.entries()) {
      if (step >= done) await runStep(connection, folderMillis, statement, step === done && !failed);
    }
    await connection.query("insert into __drizzle_migrations (hash, created_at) values (?, ?)", [
      hash,
      folderMillis,
    ]);
  }
}

/**
 * Refuses a server with unsafe settings, then brings the tables up to date, one process at a time.
 *
 * @throws DatabaseSettingsError that lists every setting at fault
 */
export async function migrateDatabase(): Promise<void> {
  await withLock(async (connection) => {
    const found = await readSettings(connection);
    const faults = settingsFaults(found, env().DATABASE_DURABILITY);
    if (faults.length > 0) {
      const list = faults.map((fault) => `  ${fault}`).join("\n");
      throw new DatabaseSettingsError(
        `This database server (${found.version}) could lose or change data, so nothing was started:\n${list}`,
      );
    }
    await compareByByte(connection, found);
    await runMigrations(connection);
    if (env().DATABASE_MIGRATION_URL !== undefined) await ownTriggers(connection);
  });
}

/** Time stamp of the newest migration this version of the code knows. */
function newestMigration(): number {
  const journal = path.resolve(env().MIGRATIONS_DIRECTORY, "meta/_journal.json");
  if (!existsSync(journal)) return 0;
  const { entries } = JSON.parse(readFileSync(journal, "utf8")) as { entries: { when: number }[] };
  return entries.reduce((newest, entry) => Math.max(newest, entry.when), 0);
}

let expected: number | undefined;

/** True when the tables are as new as the code; throws when the database is away. */
export async function migrationsAreIn(): Promise<boolean> {
  expected ??= newestMigration();
  const [tables] = await pool().query<RowDataPacket[]>("show tables like '\\_\\_drizzle\\_migrations'");
  if (tables.length === 0) return false;
  const [rows] = await pool().query<RowDataPacket[]>(
    "select max(created_at) as newest from __drizzle_migrations",
  );
  return Number(rows[0]?.newest ?? 0) >= expected;
}
