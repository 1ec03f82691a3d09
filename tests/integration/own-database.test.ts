import { spawn } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { createConnection, type RowDataPacket } from "mysql2/promise";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { settingsFaults } from "~/db/migrate.server";
import { ownTriggers } from "~/db/rights.server";
import { openDatabase, runningUrl } from "../../scripts/database.mjs";

// The server that `npm start` runs, in a folder of its own with a long name: paths of sockets have a limit.
const folder = path.join(mkdtempSync(path.join(os.tmpdir(), "lowlying-own-")), "a-long-name-".repeat(9));

async function ask(url: string, sql: string): Promise<RowDataPacket[]> {
  const connection = await createConnection({ uri: url, connectTimeout: 5_000 });
  try {
    const [rows] = await connection.query<RowDataPacket[]>(sql);
    return Array.isArray(rows) ? rows : [];
  } finally {
    await connection.end();
  }
}

const serverPid = () => Number(readFileSync(path.join(folder, "run/db.pid"), "utf8"));

describe("the database of an instance", () => {
  let database: Awaited<ReturnType<typeof openDatabase>>;
  beforeAll(async () => {
    database = await openDatabase({ folder });
  }, 120_000);
  afterAll(async () => {
    await database.close();
    rmSync(path.dirname(folder), { recursive: true, force: true });
  }, 60_000);

  it("keeps what it acknowledges, and is found by its folder", async () => {
    const [found] = await ask(
      database.url,
      `select @@global.innodb_flush_log_at_trx_commit as flush, @@global.innodb_doublewrite as doublewrite,
        @@global.sql_mode as mode, @@character_set_database as charset, @@collation_database as collation,
        @@global.max_allowed_packet as packet, version() as version`,
    );
    expect(settingsFaults(found as never, "full")).toEqual([]);
    expect(runningUrl(folder)).toBe(database.url);
  });

  it("listens on loopback alone and lets nobody in without the password", async () => {
    const url = new URL(database.url);
    expect(url.hostname).toBe("127.0.0.1");
    const [where] = await ask(database.url, "select @@bind_address as address");
    expect(where?.address).toBe("127.0.0.1");
    for (const user of ["root", "lowlying", ""]) {
      const open = `mysql://${user}@127.0.0.1:${url.port}/lowlying`;
      await expect(ask(open, "select 1")).rejects.toThrow(/Access denied/);
    }
    const [grants] = await ask(
      database.url,
      "select count(*) as n from information_schema.schemata where schema_name = 'mysql'",
    );
    expect(grants?.n).toBe(0);
  });

  it("shows its data and its password to nobody else on the machine", () => {
    expect(statSync(folder).mode & 0o077).toBe(0);
    expect(statSync(path.join(folder, "database.json")).mode & 0o077).toBe(0);
  });

  it("is shared by processes of the folder, and ends with the last of them", async () => {
    const script = `const { openDatabase } = await import("./scripts/database.mjs");
      const database = await openDatabase({ folder: ${JSON.stringify(folder)} });
      console.log(database.url);
      process.stdin.once("data", async () => { await database.close(); process.exit(0); });`;
    const other = spawn(process.execPath, ["--input-type=module", "-e", script], {
      stdio: ["pipe", "pipe", "inherit"],
    });
    const url = await new Promise<string>((resolve) =>
      other.stdout.once("data", (text) => resolve(String(text).trim())),
    );
    expect(url).toBe(database.url);
    const ended = new Promise((resolve) => other.on("exit", resolve));
    other.stdin.write("end\n");
    expect(await ended).toBe(0);
    expect(await ask(database.url, "select 1 as one")).toEqual([{ one: 1 }]);
  });

  it("comes back with its data after it was killed (F02)", async () => {
    await ask(database.ownerUrl, "create table lowlying.kept (n int)");
    await ask(database.url, "insert into lowlying.kept values (7)");
    process.kill(serverPid(), "SIGKILL");
    await expect
      .poll(
        () =>
          ask(database.url, "select 1").then(
            () => "up",
            () => "down",
          ),
        { timeout: 10_000 },
      )
      .toBe("down");
    expect(runningUrl(folder)).toBeNull();
    database = await openDatabase({ folder });
    expect(await ask(database.url, "select n from kept")).toEqual([{ n: 7 }]);
  });

  it("gives the application rows and nothing else, in folders of older versions too (security G03)", async () => {
    const { username, password } = new URL(database.url);
    // As it was: one account for everything, which made the triggers.
    const socket = { socketPath: "run/db.sock", user: "root" };
    const here = process.cwd();
    process.chdir(folder);
    const root = await createConnection(socket).finally(() => process.chdir(here));
    await root.query(`grant all privileges on lowlying.* to '${username}'@'127.0.0.1'`);
    await root.query(
      `create definer='${username}'@'127.0.0.1' trigger lowlying.guard before delete on lowlying.kept for each row set @a = 1`,
    );
    await root.query(`drop user 'lowlying_owner'@'127.0.0.1'`);
    await root.end();
    await database.close();
    const state = path.join(folder, "database.json");
    const { ownerPassword: _, ...old } = JSON.parse(readFileSync(state, "utf8"));
    writeFileSync(state, JSON.stringify(old));

    database = await openDatabase({ folder });
    expect(new URL(database.url)).toMatchObject({ username, password });
    for (const statement of ["truncate table kept", "drop trigger guard", "create table mine (n int)"]) {
      await expect(ask(database.url, statement), statement).rejects.toThrow(/denied/);
    }
    const owner = await createConnection({ uri: database.ownerUrl });
    await ownTriggers(owner);
    await owner.end();
    await ask(database.url, "delete from kept");
    expect(await ask(database.url, "select n from kept")).toEqual([]);
  }, 60_000);
});
