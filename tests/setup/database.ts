import { createConnection, type RowDataPacket } from "mysql2/promise";
import { afterAll, inject } from "vitest";

// A database for each worker process, made once and emptied before each file: files run side by side without seeing
// each other, and none depends on what another left.
const server = new URL(inject("databaseUrl"));
const name = `lowlying_test_${process.env.VITEST_POOL_ID ?? "0"}`;

const root = await createConnection({ uri: server.href });
await root.query(`create database if not exists ${name} character set utf8mb4 collate utf8mb4_bin`);
await root.end();
server.pathname = `/${name}`;
process.env.DATABASE_URL = server.href;

const { closeDatabase, pool } = await import("~/db/client.server");
const { migrateDatabase } = await import("~/db/migrate.server");
await migrateDatabase();
await emptyTables();

/** Truncating fires no triggers, so the append-only logbook can be emptied here and nowhere else. */
async function emptyTables(): Promise<void> {
  const connection = await pool().getConnection();
  const [tables] = await connection.query<(RowDataPacket & { name: string; rows: number })[]>(
    "select table_name as name from information_schema.tables where table_schema = database() and table_name not like '\\_\\_%'",
  );
  await connection.query("set foreign_key_checks = 0");
  for (const { name: table } of tables) {
    // Most tables are empty; looking is cheaper than truncating.
    const [rows] = await connection.query<RowDataPacket[]>(`select 1 from \`${table}\` limit 1`);
    if (rows.length > 0) await connection.query(`truncate table \`${table}\``);
  }
  await connection.query("set foreign_key_checks = 1");
  connection.release();
}

afterAll(closeDatabase);
