import { readMigrationFiles } from "drizzle-orm/migrator";
import { type Connection, createConnection, type RowDataPacket } from "mysql2/promise";
import { afterAll, beforeAll, describe, expect, inject, it, vi } from "vitest";
import { connectAsOwner, db, pool } from "~/db/client.server";
import { driverCode } from "~/db/driver-errors.server";
import { settingsFaults } from "~/db/migrate.server";
import { findRightsOverRecords, ownTriggers, rightsOverRecords } from "~/db/rights.server";
import { logbook } from "~/db/schema.server";

/** Every table with its columns, keys and triggers, as the server tells them. */
async function shapeOf(connection: Connection): Promise<string> {
  const read = async (sql: string) => (await connection.query<RowDataPacket[]>(sql))[0];
  const columns = await read(
    "select table_name, column_name, column_type, is_nullable, column_default, collation_name from information_schema.columns where table_schema = database() and table_name not like '\\_\\_%' order by 1, 2",
  );
  const keys = await read(
    "select table_name, index_name, column_name, seq_in_index, non_unique from information_schema.statistics where table_schema = database() and table_name not like '\\_\\_%' order by 1, 2, 4",
  );
  const foreign = await read(
    "select table_name, constraint_name, delete_rule from information_schema.referential_constraints where constraint_schema = database() order by 1, 2",
  );
  const triggers = await read(
    "select trigger_name from information_schema.triggers where trigger_schema = database() order by 1",
  );
  return JSON.stringify({ columns, keys, foreign, triggers });
}

describe("migrations", () => {
  let connection: Connection;
  const name = `lowlying_test_migrations_${process.env.VITEST_POOL_ID ?? "0"}`;

  beforeAll(async () => {
    connection = await createConnection({ uri: inject("ownerUrl"), multipleStatements: false });
  });
  afterAll(async () => {
    await connection.query(`drop database if exists ${name}`);
    await connection.end();
  });

  /** Runs the application's migration on another database, in a module world of its own. */
  async function migrateOther(): Promise<void> {
    const url = new URL(inject("ownerUrl"));
    url.pathname = `/${name}`;
    vi.resetModules();
    const before = process.env.DATABASE_MIGRATION_URL;
    process.env.DATABASE_MIGRATION_URL = url.href;
    const kept = globalThis as { lowlyingPool?: unknown };
    const pool = kept.lowlyingPool;
    kept.lowlyingPool = undefined;
    try {
      const { migrateDatabase } = await import("~/db/migrate.server");
      const { closeDatabase } = await import("~/db/client.server");
      await migrateDatabase().finally(closeDatabase);
    } finally {
      process.env.DATABASE_MIGRATION_URL = before;
      kept.lowlyingPool = pool;
    }
  }

  async function fresh(): Promise<void> {
    await connection.query(`drop database if exists ${name}`);
    await connection.query(`create database ${name} character set utf8mb4 collate utf8mb4_bin`);
    await connection.query(`use ${name}`);
  }

  it("give the same tables when the first run is cut short at any statement (F10)", async () => {
    await fresh();
    await migrateOther();
    const whole = await shapeOf(connection);
    expect(whole.length).toBeGreaterThan(5_000);

    const [first] = readMigrationFiles({ migrationsFolder: "drizzle" });
    for (const cut of [1, 7, (first?.sql.length ?? 0) - 1]) {
      await fresh();
      // What a run leaves that dies right behind a statement, before it notes it.
      await connection.query(
        "create table __migration_steps (migration bigint primary key, done int not null, failed tinyint not null)",
      );
      await connection.query("insert into __migration_steps values (?, ?, 0)", [
        first?.folderMillis,
        cut - 1,
      ]);
      for (const statement of first?.sql.slice(0, cut) ?? []) await connection.query(statement);
      await migrateOther();
      expect(await shapeOf(connection), `cut behind statement ${cut}`).toBe(whole);
    }
  });

  it("do not take a statement that failed for one that was done", async () => {
    await fresh();
    // In the way of the first table that the migrations make.
    await connection.query("create table api_tokens (id int)");
    const run = () =>
      migrateOther().then(
        () => "in",
        (error: Error) => (error as { code?: string }).code,
      );
    // The first statement may be the one that a cut run did; the next must say so every time.
    await connection.query(
      "create table __migration_steps (migration bigint primary key, done int not null, failed tinyint not null)",
    );
    const [first] = readMigrationFiles({ migrationsFolder: "drizzle" });
    await connection.query("insert into __migration_steps values (?, 0, 1)", [first?.folderMillis]);
    expect(await run()).toBe("ER_TABLE_EXISTS_ERROR");
    expect(await run()).toBe("ER_TABLE_EXISTS_ERROR");
    await connection.query("drop table api_tokens");
    expect(await run()).toBe("in");
  });

  it("can be run by two processes at once", async () => {
    await fresh();
    await migrateOther();
    const whole = await shapeOf(connection);
    await fresh();
    const url = new URL(inject("ownerUrl"));
    url.pathname = `/${name}`;
    const { spawn } = await import("node:child_process");
    const script = `process.env.DATABASE_MIGRATION_URL=${JSON.stringify(url.href)};
      const { tsImport } = await import("tsx/esm/api");
      const { migrateDatabase } = await tsImport("./app/db/migrate.server.ts", import.meta.url);
      await migrateDatabase(); process.exit(0);`;
    const once = () =>
      new Promise<number | null>((resolve) => {
        const child = spawn(process.execPath, ["--input-type=module", "-e", script], { stdio: "inherit" });
        child.on("exit", resolve);
      });
    expect(await Promise.all([once(), once()])).toEqual([0, 0]);
    expect(await shapeOf(connection)).toBe(whole);
  });
});

describe("the logbook", () => {
  it("takes rows and gives none back to change (security G03)", async () => {
    const row = { type: "sign-in", data: {}, createdAt: new Date() };
    await db.insert(logbook).values(row);
    const words = (error: unknown) => String((error as { cause?: unknown }).cause);
    await expect(db.update(logbook).set({ type: "other" }).catch(words)).resolves.toContain("append-only");
    await expect(db.delete(logbook).catch(words)).resolves.toContain("append-only");
    expect(await db.select().from(logbook)).toHaveLength(1);
  });

  it("cannot be emptied, nor its guards be taken away, by the application's account (security G03)", async () => {
    await db.insert(logbook).values({ type: "sign-in", data: {}, createdAt: new Date() });
    const refused = async (statement: string) =>
      driverCode(
        await pool()
          .query(statement)
          .catch((error: unknown) => error),
      );
    for (const table of ["logbook", "editions", "edition_files", "verifications"]) {
      for (const statement of [
        `truncate table ${table}`,
        `drop table ${table}`,
        `alter table ${table} engine=memory`,
        `rename table ${table} to elsewhere`,
        `create trigger mine before insert on ${table} for each row set @a = 1`,
        `drop trigger ${table}_never_updated`,
        `lock tables ${table} write`,
        `create or replace table ${table} (id int)`,
      ])
        expect(await refused(statement), statement).toMatch(/ACCESS_?DENIED/);
    }
    expect(await db.select().from(logbook)).not.toHaveLength(0);
    expect(await findRightsOverRecords()).toEqual([]);
  });

  it("keeps its guards when the account that made them has lost its rights", async () => {
    const owner = await connectAsOwner();
    const guards = async () =>
      (
        await owner.query<RowDataPacket[]>(
          "select trigger_name, definer, action_statement from information_schema.triggers where trigger_schema = database() order by 1",
        )
      )[0];
    const before = await guards();
    expect(before.length).toBeGreaterThan(5);
    await ownTriggers(owner);
    expect(await guards()).toEqual(before);
    await owner.end();
  });
});

describe("rights of the application's account", () => {
  const over = (grant: string) => rightsOverRecords([`GRANT ${grant} TO \`app\`@\`%\``], "lowlying");

  it("to rows alone are right", () => {
    expect(over("USAGE ON *.*")).toEqual([]);
    expect(over("SELECT, INSERT, UPDATE, DELETE ON `lowlying`.*")).toEqual([]);
    expect(over("ALL PRIVILEGES ON `other`.*")).toEqual([]);
    expect(over("DROP ON `lowlying`.`sifts`")).toEqual([]);
    expect(over("ALL PRIVILEGES ON `low\\_lying`.*")).toEqual([]);
  });

  it.each([
    ["ALL PRIVILEGES ON *.*", ["ALL PRIVILEGES"]],
    ["ALL PRIVILEGES ON `lowlying`.*", ["ALL PRIVILEGES"]],
    ["SELECT, DROP, ALTER ON `low%`.*", ["DROP", "ALTER"]],
    ["TRIGGER ON `lowlyin_`.*", ["TRIGGER"]],
    ["SELECT, DROP ON `lowlying`.`logbook`", ["DROP"]],
    ["SUPER ON *.*", ["SUPER"]],
  ])("that get round the triggers are named: %s", (grant, names) => expect(over(grant)).toEqual(names));
});

describe("settings of the database server", () => {
  const good = {
    flush: 1,
    doublewrite: 1,
    mode: "STRICT_TRANS_TABLES,NO_ENGINE_SUBSTITUTION",
    charset: "utf8mb4",
    collation: "utf8mb4_bin",
    packet: 16_777_216,
    version: "10.11",
  };

  it("pass when data survives a power cut (F01)", () => {
    expect(settingsFaults(good, "full")).toEqual([]);
    expect(settingsFaults({ ...good, doublewrite: "ON", flush: "1" }, "full")).toEqual([]);
  });

  it.each([
    [{ flush: 2 }, "innodb_flush_log_at_trx_commit is 2"],
    [{ flush: 0 }, "innodb_flush_log_at_trx_commit is 0"],
    [{ doublewrite: 0 }, "innodb_doublewrite is 0"],
    [{ doublewrite: "OFF" }, "innodb_doublewrite is OFF"],
    [{ mode: "" }, 'sql_mode is ""'],
    [{ charset: "latin1" }, "character set is latin1"],
    [{ packet: 1_048_576 }, "max_allowed_packet is 1048576"],
  ])("are refused by name: %j", (change, words) => {
    expect(settingsFaults({ ...good, ...change }, "full").join()).toContain(words);
  });

  it("may be relaxed for throw-away servers, but not in what changes values", () => {
    expect(settingsFaults({ ...good, flush: 0, doublewrite: 0 }, "relaxed")).toEqual([]);
    expect(settingsFaults({ ...good, mode: "" }, "relaxed")).toHaveLength(1);
  });
});
