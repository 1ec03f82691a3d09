import { and, asc, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, ensembles, frames } from "../../db/schema.server.ts";
import type { Warnings } from "../../lib/api/schemas.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatCount } from "../../lib/format.ts";
import { asEnergyUnit } from "../../lib/intake/batch-energies.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { kcalPer } from "../../lib/units.ts";
import { hasGeometry } from "../ensembles/accepted-frames.server.ts";
import { levelWarnings } from "../ensembles/judge-spread.server.ts";
import type { FoundSift } from "./find-sift.server.ts";

type Kept = SiftResult["kept"];

/** kcal/mol: the same numbers subtracted again give the same digits, shifted ones differ in the last. */
const SAME_KCAL = 1e-6;

/** What a sift ran on and what stands there now differ: in words, or null where they do not. */
async function whatChanged(sift: FoundSift, kept: Kept): Promise<string | null> {
  if (sift.geometrySha !== null && !(await hasGeometry(db, sift.ensembleId, sift.geometrySha))) {
    return "The structures were read again in another way";
  }
  const { level, levelName } = sift.recipe;
  if (level === null) return null;
  const [row] = await db
    .select({ unit: columns.unit, data: columns.data, frames: ensembles.frames })
    .from(columns)
    .innerJoin(ensembles, eq(ensembles.id, columns.ensembleId))
    .where(and(eq(columns.ensembleId, sift.ensembleId), eq(columns.id, level)));
  const unit = asEnergyUnit(row?.unit ?? null);
  if (row === undefined || unit === null) {
    return `The level “${levelName}” was removed, or its files were read again under another name`;
  }
  const { values, present } = unpackColumn(row.data, row.frames);
  const lowest = values[(kept[0]?.frame ?? 1) - 1] ?? 0;
  const same = kept.every(({ frame, relativeEnergy }) => {
    if (present[frame - 1] !== 1 || relativeEnergy === null) return false;
    const now = ((values[frame - 1] ?? 0) - lowest) * kcalPer(unit);
    return Math.abs(now - relativeEnergy) <= SAME_KCAL;
  });
  return same ? null : `The energies of “${levelName}” were read again or replaced`;
}

/**
 * Refuses what would mix a sift's own numbers with others: energies, units or coordinates that were read again or
 * replaced since. Frames held, released or added leave its numbers as they are.
 *
 * @throws DomainError conflict
 */
export async function checkStands(sift: FoundSift, kept: Kept): Promise<void> {
  if (sift.current) return;
  const changed = await whatChanged(sift, kept);
  if (changed === null) return;
  throw new DomainError(
    "conflict",
    "The data were read again",
    `${changed} after this sift: its numbers and those of the ensemble no longer belong together. Sift again.`,
  );
}

/** Frame numbers as a list in words, the first few of them. */
function listed(numbers: readonly number[]): string {
  const shown = numbers.slice(0, 5).join(", ");
  return numbers.length > 5 ? `${shown} and ${formatCount(numbers.length - 5)} more` : shown;
}

async function heldNow(ensembleId: string, kept: Kept): Promise<number[]> {
  const rows = await db
    .select({ number: frames.number })
    .from(frames)
    .where(
      and(
        eq(frames.ensembleId, ensembleId),
        eq(frames.state, "held"),
        inArray(
          frames.number,
          kept.map(({ frame }) => frame),
        ),
      ),
    )
    .orderBy(asc(frames.number));
  return rows.map(({ number }) => number);
}

/**
 * What is to be known of everything that rests on a sift: frames were held, released or added since, or energies that
 * conformers of one molecule do not have.
 *
 * @param result null until it is done
 */
export async function siftWarnings(
  sift: FoundSift,
  result: Pick<SiftResult, "kept"> | null,
): Promise<Warnings> {
  if (sift.current) return levelWarnings(db, sift.ensembleId, sift.recipe.level);
  if (result === null) return [];
  const changed = await whatChanged(sift, result.kept);
  if (changed !== null) {
    return [{ code: "not-current", message: `${changed} after this sift. Sift again.` }];
  }
  const held = result.kept.length === 0 ? [] : await heldNow(sift.ensembleId, result.kept);
  const words = held.length === 1 ? "is held now and stands" : "are held now and stand";
  const which = held.length === 0 ? "" : ` Of its set, ${listed(held)} ${words} in it still.`;
  const message = `Frames were held, released or added after this sift.${which} Sift again for the frames as they are.`;
  return [{ code: "not-current", message }, ...(await levelWarnings(db, sift.ensembleId, sift.recipe.level))];
}
