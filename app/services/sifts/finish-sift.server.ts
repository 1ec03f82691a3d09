import { setTimeout as pause } from "node:timers/promises";
import { and, asc, eq } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { isDatabaseAway } from "../../db/driver-errors.server.ts";
import { columns, frames, sifts } from "../../db/schema.server.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { distinctPopulations } from "../../lib/thermo/populations.ts";
import { STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import type { EnergyKind } from "../../lib/views.ts";
import { finishJob } from "../jobs/finish-job.server.ts";
import { CODE_VERSION } from "./code-version.ts";

/** Shares that a strip of an ensemble shows; the rest goes into one. */
const SHARES = 60;
/** Seconds between tries to store a result while the database is away: two minutes in all. */
const STORE_RETRIES = [1, 2, 5, 10, 15, 30, 60];

/** What a table of ensembles shows of a distinct set. */
export function summarise(kept: SiftResult["kept"], energyKind: EnergyKind) {
  const weighed = distinctPopulations(kept, energyKind, STANDARD_TEMPERATURE_K);
  if (weighed === null) return { shares: [], lowest: null, effectiveCount: null };
  const falling = [...weighed.populations].sort((a, b) => b - a);
  const rest = falling.slice(SHARES).reduce((sum, share) => sum + share, 0);
  return {
    shares: rest > 0 ? [...falling.slice(0, SHARES), rest] : falling,
    lowest: weighed.populations[0] ?? null,
    effectiveCount: weighed.effectiveCount,
  };
}

async function heldFrames(tx: Transaction, ensembleId: string): Promise<SiftResult["held"]> {
  const rows = await tx
    .select({ frame: frames.number, reason: frames.holdReason, note: frames.note })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.state, "held")))
    .orderBy(asc(frames.number));
  return rows.map(({ frame, reason, note }) => ({ frame, reason: note ?? reason ?? "held" }));
}

async function energyKindOf(tx: Transaction, levelId: string | null): Promise<EnergyKind> {
  if (levelId === null) return "electronic";
  const rows = await tx.select({ kind: columns.energyKind }).from(columns).where(eq(columns.id, levelId));
  return rows[0]?.kind ?? "electronic";
}

interface Finished {
  siftId: string;
  jobId: string;
  holder: string;
  result: Omit<SiftResult, "held">;
}

async function store(tx: Transaction, { siftId, jobId, holder, result }: Finished): Promise<void> {
  await finishJob(tx, jobId, holder);
  const rows = await tx
    .select({ ensembleId: sifts.ensembleId, recipe: sifts.recipe })
    .from(sifts)
    .where(eq(sifts.id, siftId));
  const sift = rows[0];
  if (sift === undefined) throw new Error(`Sift ${siftId} is gone.`);
  const held = await heldFrames(tx, sift.ensembleId);
  const { kept, dropped, ...rest } = result;
  const full: SiftResult = { kept, dropped, held, ...rest };
  await tx
    .update(sifts)
    .set({
      result: JSON.stringify(full),
      keptCount: kept.length,
      summary: summarise(kept, await energyKindOf(tx, sift.recipe.level)),
      codeVersion: CODE_VERSION,
    })
    .where(eq(sifts.id, siftId));
}

/**
 * Stores the result of a sift and ends its job, once. Held frames are those at this moment. While the database is away
 * it is tried again; nobody should compute twice for that.
 *
 * @throws JobLost where the job was cancelled or taken over meanwhile
 */
export async function finishSift(finished: Finished): Promise<void> {
  for (const seconds of STORE_RETRIES) {
    try {
      return await inTransaction((tx) => store(tx, finished));
    } catch (error) {
      if (!isDatabaseAway(error)) throw error;
      await pause(seconds * 1000);
    }
  }
  await inTransaction((tx) => store(tx, finished));
}
