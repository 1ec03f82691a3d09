import { count } from "drizzle-orm";
import { db } from "~/db/client.server";
import {
  batches,
  columns,
  ensembleFiles,
  ensembles,
  frameBlocks,
  frames,
  intakeMessages,
  jobs,
  logbook,
  questions,
  series,
  sifts,
  sourceChunks,
  sources,
} from "~/db/schema.server";

const TABLES = {
  batches,
  columns,
  ensembleFiles,
  ensembles,
  frameBlocks,
  frames,
  intakeMessages,
  jobs,
  logbook,
  questions,
  series,
  sifts,
  sourceChunks,
  sources,
};

/** Rows of every table that an intake touches, those in flight too: equal before and after means nothing half stored. */
export async function storedRows(): Promise<Record<string, number>> {
  const counted = Object.entries(TABLES).map(async ([name, table]) => {
    const rows = await db.select({ n: count() }).from(table);
    return [name, rows[0]?.n ?? 0] as const;
  });
  return Object.fromEntries(await Promise.all(counted));
}
