import { asc, eq } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { ensembleFiles } from "../../db/schema.server.ts";
import { log } from "../log.server.ts";
import { Reading, type ReadingOptions, type ReadResult } from "./reading.server.ts";
import { readSource } from "./source-writer.server.ts";

/** A file as it is kept. */
export interface StoredFile {
  name: string;
  sourceId: string;
}

/** Ids of the kept bytes, one a file of the reading. */
export function sourcesOf(reading: Reading, files: readonly StoredFile[]): string[] {
  return reading.files.map(({ source }) => files[source]?.sourceId ?? "");
}

/** Files of an ensemble as they are kept, in order; entries of one archive are one file. */
export async function findStored(
  ensembleId: string,
  on: Queryable = db,
): Promise<(StoredFile & { batch: number })[]> {
  const rows = await on
    .select({
      name: ensembleFiles.name,
      entry: ensembleFiles.entry,
      sourceId: ensembleFiles.sourceId,
      batch: ensembleFiles.batch,
    })
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, ensembleId))
    .orderBy(asc(ensembleFiles.position));
  const isNext = (k: number) =>
    rows[k]?.entry !== null &&
    rows[k]?.sourceId === rows[k - 1]?.sourceId &&
    rows[k]?.batch === rows[k - 1]?.batch;
  return rows.filter((_, k) => !isNext(k)).map(({ name, sourceId, batch }) => ({ name, sourceId, batch }));
}

type By = { teamId: string; userId: string | null; tokenId: string | null };

export interface EndedReading {
  reading: Reading;
  result: ReadResult;
}

/** Takes back what a reading wrote; what cannot be taken back now, the sweeper finds. */
export async function takeBack(reading: Reading): Promise<void> {
  await reading.discard().catch((error) => log.warn({ err: error }, "reading not taken back"));
}

async function readAll(by: By, files: readonly StoredFile[], options: ReadingOptions): Promise<EndedReading> {
  const reading = new Reading(by.teamId, options);
  try {
    await reading.begin(by);
    for (const file of files) await reading.readFile(file.name, readSource(file.sourceId));
    return { reading, result: await reading.end() };
  } catch (error) {
    await takeBack(reading);
    throw error;
  }
}

/**
 * Ends a reading. Where frames of the molecule stand in another order of atoms, the files are read once more, now that
 * the group is known, with each of these frames put into its order; the first reading is taken back then.
 *
 * @param files as they are kept, for the second time
 */
export async function endReading(
  reading: Reading,
  by: By,
  files: readonly StoredFile[],
): Promise<EndedReading> {
  const result = await reading.end();
  if (!result.otherOrder || reading.options.map) return { reading, result };
  const again = await readAll(by, files, { ...reading.options, group: result.group, map: true });
  await takeBack(reading);
  return again;
}

/** Reads kept files into rows that nobody sees yet. */
export async function readStored(
  by: By,
  files: readonly StoredFile[],
  options: ReadingOptions,
): Promise<EndedReading> {
  const first = await readAll(by, files, options);
  if (!first.result.otherOrder || options.map) return first;
  try {
    return await readAll(by, files, { ...options, group: first.result.group, map: true });
  } finally {
    await takeBack(first.reading);
  }
}
