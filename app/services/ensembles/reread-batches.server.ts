import { and, asc, eq, gt } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { batches, ensembles } from "../../db/schema.server.ts";
import { kindWasStated } from "../../lib/intake/decide-energies.ts";
import type { ReadingChoices } from "../../lib/intake/reading-choices.ts";
import type { Grant } from "../auth/access.server.ts";
import { countFiles, optionsAt } from "./batch-place.server.ts";
import { completeBatch, numberOf, ownLevel } from "./complete-batch.server.ts";
import { bondTableOf, type WrittenAnswers } from "./complete-reading.server.ts";
import { countFrames } from "./intake-rows.server.ts";
import { mergeBatch } from "./merge-batch.server.ts";
import { readStored, type StoredFile, sourcesOf, takeBack } from "./read-stored.server.ts";

type At = Grant & { ensembleId: string };

const NOTHING_SAID: WrittenAnswers = {
  energyUnit: null,
  energyFrom: null,
  level: null,
  energyKind: "electronic",
  energyTemperature: null,
};

/** Answers of the batches of an ensemble beyond its first, by number. */
async function answersOf(ensembleId: string): Promise<Map<number, WrittenAnswers>> {
  const rows = await db
    .select({ batch: batches.batch, answers: batches.answers })
    .from(batches)
    .where(and(eq(batches.ensembleId, ensembleId), gt(batches.batch, 0)))
    .orderBy(asc(batches.batch));
  return new Map(rows.map(({ batch, answers }) => [batch, answers]));
}

/** What was said of a batch and is not merely what was said of the first upload too: that follows the new answers. */
function ownAnswers(batch: WrittenAnswers, before: WrittenAnswers): WrittenAnswers {
  const own = (key: "energyUnit" | "energyFrom" | "level") =>
    batch[key] === before[key] ? null : batch[key];
  return { ...batch, energyUnit: own("energyUnit"), energyFrom: own("energyFrom"), level: own("level") };
}

async function readOne(
  at: At,
  readId: string,
  files: readonly StoredFile[],
  stated: WrittenAnswers,
  { batch, settled }: { batch: number; settled: ReadonlySet<number> },
) {
  const [ensemble] = await db.select().from(ensembles).where(eq(ensembles.id, readId));
  if (ensemble === undefined) throw new Error(`The reading ${readId} is gone.`);
  const place = { ensemble, files: (await countFiles(readId)).files, batch };
  const level = await ownLevel(ensemble, stated.level);
  const from = numberOf(stated.energyFrom, level);
  const { reading, result } = await readStored(
    at,
    files,
    optionsAt(place, from, stated.reading ?? {}, settled),
  );
  try {
    const done = await completeBatch(reading, result, ensemble, {
      stated,
      kindStated: kindWasStated(stated),
      sources: sourcesOf(reading, files),
      batch,
    });
    await inTransaction(async (tx) => {
      await mergeBatch(tx, ensemble, { ensembleId: reading.ensembleId, result, columns: done.columns });
      await tx
        .update(ensembles)
        .set({ ...(await countFrames(tx, readId)), bondTable: ensemble.bondTable ?? bondTableOf(result) })
        .where(eq(ensembles.id, readId));
    });
  } catch (error) {
    await takeBack(reading);
    throw error;
  }
}

/**
 * Reads the further batches of an ensemble again, each as it was added, behind a first upload that was read again into
 * the row in flight.
 *
 * @param files of the batches in order
 */
export async function rereadBatches(
  at: At,
  readId: string,
  files: readonly (StoredFile & { batch: number })[],
  known: {
    /** Answers of the first upload until now. */
    before: WrittenAnswers;
    /** How files are to be read from now on, by batch. */
    readings: ReadonlyMap<number, ReadingChoices>;
    /** Frames that a person released while they waited. */
    settled: ReadonlySet<number>;
  },
): Promise<void> {
  const answers = await answersOf(at.ensembleId);
  for (const batch of new Set(files.map((file) => file.batch))) {
    const own = files.filter((file) => file.batch === batch);
    const stated = ownAnswers(answers.get(batch) ?? NOTHING_SAID, known.before);
    const reading = known.readings.get(batch) ?? stated.reading;
    await readOne(
      at,
      readId,
      own,
      { ...stated, ...(reading ? { reading } : {}) },
      {
        batch,
        settled: known.settled,
      },
    );
  }
}
