import { eq, sql } from "drizzle-orm";
import { beforeEach, describe, expect, it } from "vitest";
import { db, inTransaction, type Transaction } from "~/db/client.server";
import { driverCode, isDatabaseAway, isDuplicate } from "~/db/driver-errors.server";
import { throttles } from "~/db/schema.server";

const WHEN = new Date("2026-03-01T00:00:00Z");

beforeEach(async () => {
  await db.delete(throttles);
  await db.insert(throttles).values([
    { name: "a", count: 0, windowStart: WHEN },
    { name: "b", count: 0, windowStart: WHEN },
  ]);
});

const add = (tx: Transaction, name: string) =>
  tx
    .update(throttles)
    .set({ count: sql`${throttles.count} + 1` })
    .where(eq(throttles.name, name));

const counts = async () => {
  const rows = await db.select({ name: throttles.name, count: throttles.count }).from(throttles);
  return Object.fromEntries(rows.map(({ name, count }) => [name, count]));
};

describe("a transaction", () => {
  it("that the database ended for a deadlock is run again as a whole (F06)", async () => {
    const runs = { first: 0, second: 0 };
    const met: { [key: string]: () => void } = {};
    const both = Promise.all(
      ["first", "second"].map(
        (name) =>
          new Promise<void>((resolve) => {
            met[name] = resolve;
          }),
      ),
    );
    const crossed = (name: "first" | "second", order: [string, string]) =>
      inTransaction(async (tx) => {
        runs[name] += 1;
        await add(tx, order[0]);
        // Each holds one row now and wants the other's: the database has to end one of them.
        met[name]?.();
        await both;
        await add(tx, order[1]);
      });
    await Promise.all([crossed("first", ["a", "b"]), crossed("second", ["b", "a"])]);
    expect(runs.first + runs.second).toBe(3);
    expect(await counts()).toEqual({ a: 2, b: 2 });
  });

  it("that waited too long for a lock is run again as a whole (F06)", async () => {
    let release: () => void = () => {};
    const held = new Promise<void>((resolve) => {
      release = resolve;
    });
    let holds: () => void = () => {};
    const holding = new Promise<void>((resolve) => {
      holds = resolve;
    });
    const holder = inTransaction(async (tx) => {
      await add(tx, "a");
      holds();
      await held;
    });
    await holding;
    let runs = 0;
    await inTransaction(async (tx) => {
      runs += 1;
      await tx.execute(sql`set innodb_lock_wait_timeout = 1`);
      await add(tx, "b");
      if (runs === 2) release();
      await add(tx, "a");
    });
    await holder;
    expect(runs).toBe(2);
    expect(await counts()).toEqual({ a: 2, b: 1 });
    await inTransaction((tx) => tx.execute(sql`set innodb_lock_wait_timeout = default`));
  });

  it("is run four times at most, and leaves nothing when it fails", async () => {
    let runs = 0;
    const deadlock = Object.assign(new Error("deadlock"), { code: "ER_LOCK_DEADLOCK" });
    const work = inTransaction(async (tx) => {
      runs += 1;
      await add(tx, "a");
      throw new Error("wrapped", { cause: deadlock });
    });
    await expect(work).rejects.toThrow("wrapped");
    expect(runs).toBe(4);
    expect(await counts()).toEqual({ a: 0, b: 0 });
  });

  it("that fails for another reason is run once", async () => {
    let runs = 0;
    const work = inTransaction(async (tx) => {
      runs += 1;
      await add(tx, "a");
      await tx.insert(throttles).values({ name: "b", count: 0, windowStart: WHEN });
    });
    const error: unknown = await work.catch((failure: unknown) => failure);
    expect(runs).toBe(1);
    expect(isDuplicate(error)).toBe(true);
    expect(isDatabaseAway(error)).toBe(false);
    expect(await counts()).toEqual({ a: 0, b: 0 });
  });
});

describe("failures of the driver", () => {
  it("are known behind their wrappers", () => {
    const refused = Object.assign(new Error("connect"), { code: "ECONNREFUSED" });
    expect(driverCode(new Error("outer", { cause: new Error("inner", { cause: refused }) }))).toBe(
      "ECONNREFUSED",
    );
    expect(isDatabaseAway(refused)).toBe(true);
    expect(isDatabaseAway(Object.assign(new Error("gone"), { code: "PROTOCOL_CONNECTION_LOST" }))).toBe(true);
    expect(isDatabaseAway(new Error("plain"))).toBe(false);
    expect(driverCode("no error")).toBeNull();
    // Files that are missing are no database that is away.
    expect(isDatabaseAway(Object.assign(new Error("open"), { code: "ENOENT" }))).toBe(false);
  });
});

describe("what the connection keeps", () => {
  it("times to the millisecond in UTC, texts byte for byte", async () => {
    const at = new Date("2026-07-01T12:34:56.789Z");
    await db.insert(throttles).values({ name: "ä 🙂 '\"\\", count: 1, windowStart: at });
    const [row] = await db.select().from(throttles).where(eq(throttles.name, "ä 🙂 '\"\\"));
    expect(row).toMatchObject({ windowStart: at, name: "ä 🙂 '\"\\" });
    expect(await db.select().from(throttles).where(eq(throttles.name, "A"))).toEqual([]);
    const [zone] = await db.execute(sql`select @@session.time_zone as zone, @@session.sql_mode as mode`);
    expect(zone).toMatchObject([{ zone: "+00:00", mode: expect.stringContaining("STRICT_ALL_TABLES") }]);
  });
});
