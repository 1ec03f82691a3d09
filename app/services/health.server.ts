import { pool } from "../db/client.server.ts";
import { migrationsAreIn } from "../db/migrate.server.ts";
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

/** True when requests can be served: the database answers and its tables are as new as the code. */
export async function isReady(): Promise<boolean> {
  try {
    return await within(migrationsAreIn());
  } catch {
    return false;
  }
}
