import { statfs } from "node:fs/promises";
import { tmpdir } from "node:os";
import type { RowDataPacket } from "mysql2/promise";
import { pool } from "../db/client.server.ts";
import { migrationsAreIn } from "../db/migrate.server.ts";
import { env } from "../env.server.ts";
import { databaseAway } from "./http.server.ts";

/** A person waits: two seconds are the most a page may take to say that the database is away. */
const PATIENCE_MS = 1_500;
const KEPT_MS = 100;

let last: { at: number; answer: Promise<boolean> } | undefined;

/** The work's result, or a failure once the patience of a person is over. */
export async function within<Result>(work: Promise<Result>, ms = PATIENCE_MS): Promise<Result> {
  let timer: ReturnType<typeof setTimeout> | undefined;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(databaseAway()), ms);
  });
  try {
    return await Promise.race([work, late]);
  } finally {
    clearTimeout(timer);
  }
}

async function ask(): Promise<boolean> {
  try {
    await within(pool().query("select 1"));
    return true;
  } catch {
    return false;
  }
}

/** True when the database answers. Requests of one moment share a look; a "no" is looked at again by the next. */
export async function databaseAnswers(now = performance.now()): Promise<boolean> {
  if (last === undefined || now - last.at > KEPT_MS) {
    const look = { at: now, answer: ask() };
    last = look;
    if (!(await look.answer) && last === look) last = undefined;
    return look.answer;
  }
  return last.answer;
}

/** Uploads of archives and letters of the local fake need some; the database of an instance lies there too. */
const LEAST_DISK_BYTES = 64 * 2 ** 20;
/** A job that waits so long while none runs waits for nobody. */
const STALLED_MINUTES = 10;

/** Bytes that are free where a folder lies; a folder that is made with its first file is not full yet. */
async function freeBytes(folder: string): Promise<number> {
  return statfs(folder).then(
    ({ bavail, bsize }) => bavail * bsize,
    () => Number.POSITIVE_INFINITY,
  );
}

async function hasDisk(freeOf: typeof freeBytes): Promise<boolean> {
  const free = await Promise.all([tmpdir(), env().DATA_DIRECTORY].map(freeOf));
  return Math.min(...free) >= LEAST_DISK_BYTES;
}

/** By the database's clock. Long queues are no fault as long as somebody works on them. */
async function queueMoves(): Promise<boolean> {
  const [rows] = await pool().query<RowDataPacket[]>(
    `select exists (select 1 from jobs where state = 'queued' and created_at < utc_timestamp(3) - interval ${STALLED_MINUTES} minute)
       and not exists (select 1 from jobs where state = 'running' and lease_until > utc_timestamp(3))
       and not exists (select 1 from jobs where finished_at > utc_timestamp(3) - interval ${STALLED_MINUTES} minute) as stalled`,
  );
  return Number(rows[0]?.stalled) === 0;
}

/** Why requests cannot be served, in words without figures; null when they can. */
export async function notReadyBecause(freeOf = freeBytes): Promise<string | null> {
  const checks: [() => Promise<boolean>, string][] = [
    [migrationsAreIn, "the database does not answer, or its tables are not up to date"],
    [() => hasDisk(freeOf), "there is no room on the disk"],
    [queueMoves, "jobs wait and nobody works on them"],
  ];
  for (const [check, why] of checks) {
    const passed = await within(check()).catch(() => false);
    if (!passed) return why;
  }
  return null;
}
