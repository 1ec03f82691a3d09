import { appendFileSync, mkdtempSync, readFileSync, rmSync, statSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { count, eq } from "drizzle-orm";
import { createConnection, type RowDataPacket } from "mysql2/promise";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { driverCode } from "~/db/driver-errors.server";
import { migrateDatabase } from "~/db/migrate.server";
import { editions, logbook, sourceChunks } from "~/db/schema.server";
import { env } from "~/env.server";
import { askToVerify } from "~/services/editions/ask-to-verify.server";
import { lastVerification } from "~/services/editions/find-edition.server";
import { waitForJob } from "~/services/jobs/wait-for-job.server";
import { backUp, restore } from "../../scripts/lib/backup.mjs";
import { freeze, makeSifted, personOf } from "../factories/editions";
import { makeLab, withJobs } from "../factories/upload";

const folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-backup-"));
const url = env().DATABASE_MIGRATION_URL ?? "";
const saved = path.join(folder, "first");

/** Leaves the database as a new one is. */
async function dropTables(): Promise<void> {
  const connection = await createConnection({ uri: url });
  const [tables] = await connection.query<RowDataPacket[]>(
    "select table_name as name from information_schema.tables where table_schema = database()",
  );
  await connection.query("set foreign_key_checks = 0");
  for (const { name } of tables) await connection.query(`drop table \`${name}\``);
  await connection.end();
}

const codeOf = (attempt: Promise<unknown>) =>
  attempt.then(
    () => "done",
    (error: unknown) => driverCode(error),
  );

describe("a backup", () => {
  let lab: Awaited<ReturnType<typeof makeLab>>;
  let at: Awaited<ReturnType<typeof makeSifted>>;
  let edition: Awaited<ReturnType<typeof freeze>>;
  let runner: Awaited<ReturnType<typeof withJobs>>;

  beforeAll(async () => {
    runner = await withJobs();
    lab = await makeLab("Estuary");
    at = await makeSifted(lab);
    edition = await freeze(personOf(lab.analyst.id), at);
  }, 90_000);
  afterAll(async () => {
    await runner.stop();
    rmSync(folder, { recursive: true, force: true });
  });

  it("comes back with the same rows, the same edition and the rules that only add (security F11)", async () => {
    const [before] = await db.select().from(editions).where(eq(editions.id, edition.id));
    const [chunks] = await db.select({ n: count() }).from(sourceChunks);
    // The application's account sees no triggers: they would be missing.
    const narrow = backUp({ url: env().DATABASE_URL, folder: saved, version: "test" });
    await expect(narrow).rejects.toThrow(/DATABASE_MIGRATION_URL/);
    const made = await backUp({ url, folder: saved, version: "test" });
    expect(made.tables.editions?.rows).toBe(1);
    expect(made.tables.source_chunks?.rows).toBe(chunks?.n);
    expect(statSync(saved).mode & 0o077).toBe(0);
    // What is there is neither overwritten by a second backup nor mixed with a restored one.
    await expect(backUp({ url, folder: saved, version: "test" })).rejects.toThrow(/holds a backup already/);
    await expect(restore({ url, folder: saved })).rejects.toThrow(/not empty/);

    await dropTables();
    const back = await restore({ url, folder: saved });
    expect(back.tables).toEqual(made.tables);
    expect(back.rows).toBe(made.rows);
    await migrateDatabase();
    expect((await db.select().from(editions).where(eq(editions.id, edition.id)))[0]).toEqual(before);
    const jobId = await askToVerify({
      actor: personOf(lab.analyst.id),
      ensembleId: at.ensembleId,
      number: edition.number,
    });
    await waitForJob(jobId, 60_000);
    expect(await lastVerification(edition.id)).toMatchObject({ same: true });
    expect(await codeOf(db.update(editions).set({ title: "another" }))).toBe("ER_SIGNAL_EXCEPTION");
    expect(await codeOf(db.delete(editions))).toBe("ER_SIGNAL_EXCEPTION");
    expect(await codeOf(db.update(logbook).set({ userId: null }))).toBe("ER_SIGNAL_EXCEPTION");
    expect(await codeOf(db.delete(logbook))).toBe("ER_SIGNAL_EXCEPTION");
  }, 120_000);

  it("is refused when its file was changed, or where there is none", async () => {
    const dump = path.join(saved, "lowlying.sql.gz");
    expect(readFileSync(dump).subarray(0, 2)).toEqual(Buffer.from([0x1f, 0x8b]));
    appendFileSync(dump, "x");
    await expect(restore({ url, folder: saved })).rejects.toThrow(/its checksum differs/);
    await expect(restore({ url, folder })).rejects.toThrow(/holds no backup/);
  });
});
