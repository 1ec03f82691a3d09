import { drizzle, type MySql2Database } from "drizzle-orm/mysql2";
import { type Connection, createConnection, createPool, type Pool } from "mysql2/promise";
import { env } from "../env.server.ts";
import { driverCode } from "./driver-errors.server.ts";
import * as schema from "./schema.server.ts";

type Database = MySql2Database<typeof schema>;
export type Transaction = Parameters<Parameters<Database["transaction"]>[0]>[0];
/** What a query can run on: the pool or an open transaction. */
export type Queryable = Database | Transaction;

// Development reloads modules; without one place for them every reload would open another pool.
const kept = globalThis as typeof globalThis & { lowlyingPool?: Pool };

/** Sets what every session relies on: UTC, and errors instead of silently changed values. */
const SESSION_SETTINGS =
  "set time_zone = '+00:00', sql_mode = 'STRICT_ALL_TABLES,ERROR_FOR_DIVISION_BY_ZERO,NO_ENGINE_SUBSTITUTION', names utf8mb4 collate utf8mb4_bin";

const uriOf = (url: string) => url.replace(/^mariadb:/, "mysql:");

const CONNECTION = {
  // A database that is away must be noticed while a person still waits for the page.
  connectTimeout: 1_500,
  timezone: "Z",
  charset: "utf8mb4_bin",
  // MariaDB's JSON is text; the column type parses and checks it.
  jsonStrings: true,
} as const;

function openPool(): Pool {
  const opened = createPool({
    ...CONNECTION,
    uri: uriOf(env().DATABASE_URL),
    connectionLimit: 12,
    maxIdle: 4,
    idleTimeout: 60_000,
  });
  opened.on("connection", (connection) => {
    // Queued ahead of the caller's first statement on this connection.
    connection.query(SESSION_SETTINGS);
  });
  return opened;
}

/** One pool a process. */
export function pool(): Pool {
  kept.lowlyingPool ??= openPool();
  return kept.lowlyingPool;
}

/** One connection of the account that owns the tables; the caller ends it. */
export async function connectAsOwner(): Promise<Connection> {
  const { DATABASE_URL, DATABASE_MIGRATION_URL } = env();
  const connection = await createConnection({
    ...CONNECTION,
    uri: uriOf(DATABASE_MIGRATION_URL ?? DATABASE_URL),
  });
  await connection.query(SESSION_SETTINGS);
  return connection;
}

/** Relational queries run in planetscale mode: MariaDB has no LATERAL. */
export const db: Database = drizzle(pool(), { schema, mode: "planetscale", casing: "snake_case" });

/** Ends the pool; afterwards the process can exit. */
export async function closeDatabase(): Promise<void> {
  const open = kept.lowlyingPool;
  kept.lowlyingPool = undefined;
  await open?.end();
}

const RETRIES = 3;

/**
 * Runs work in one transaction, and the whole of it again (up to three times) when the database ended it for a
 * deadlock or a lock wait. The work must therefore have no effect but on the database.
 */
export async function inTransaction<Result>(
  work: (tx: Transaction) => Promise<Result>,
  options: { isolation?: "read committed" | "repeatable read" } = {},
): Promise<Result> {
  for (let attempt = 0; ; attempt++) {
    try {
      return await db.transaction(work, { isolationLevel: options.isolation ?? "repeatable read" });
    } catch (error) {
      const code = driverCode(error);
      const again = code === "ER_LOCK_DEADLOCK" || code === "ER_LOCK_WAIT_TIMEOUT";
      if (!again || attempt >= RETRIES) throw error;
      await new Promise((resolve) => setTimeout(resolve, 10 * 2 ** attempt));
    }
  }
}
