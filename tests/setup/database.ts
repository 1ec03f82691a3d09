import { createConnection, type RowDataPacket } from "mysql2/promise";
import { afterAll, inject } from "vitest";

// A database for each worker process, made once and emptied before each file: files run side by side without seeing
// each other, and none depends on what another left.
const [server, owner] = [new URL(inject("databaseUrl")), new URL(inject("ownerUrl"))];
const name = `lowlying_test_${process.env.VITEST_POOL_ID ?? "0"}`;

const root = await createConnection({ uri: owner.href });
await root.query(`create database if not exists ${name} character set utf8mb4 collate utf8mb4_bin`);
await root.end();
server.pathname = `/${name}`;
owner.pathname = `/${name}`;
process.env.DATABASE_URL = server.href;
process.env.DATABASE_MIGRATION_URL = owner.href;

const { closeDatabase, connectAsOwner } = await import("~/db/client.server");
const { migrateDatabase } = await import("~/db/migrate.server");
await migrateDatabase();
await emptyTables();

/** Truncating fires no triggers, so who owns the tables can empty the append-only logbook too. */
async function emptyTables(): Promise<void> {
  const connection = await connectAsOwner();
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
  await connection.end();
}

afterAll(closeDatabase);
