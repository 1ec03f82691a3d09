import type { ComparisonAnswer } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Alignment } from "../../lib/levels/align.ts";
import { compareLevels } from "../../lib/levels/compare.ts";
import { ENERGY_UNITS, kcalPer, STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import type { LevelView } from "../../lib/views.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns, loadColumn, pickLevel, toLevels } from "../ensembles/find-columns.server.ts";
import { findSift } from "../sifts/find-sift.server.ts";
import { needResult } from "../sifts/populations.server.ts";

function invalid(field: string, message: string): DomainError {
  return new DomainError("invalid", "The comparison cannot be made", message, {
    faults: [{ field, message }],
  });
}

/** The level that is asked for; the refusal names the option at fault. */
function levelOf(levels: readonly LevelView[], asked: string, field: "level" | "reference"): LevelView {
  try {
    return pickLevel(levels, asked);
  } catch (error) {
    throw error instanceof DomainError ? invalid(field, error.message) : error;
  }
}

/** Frames that are compared, with the copies that each stands for. */
async function framesOf(ensembleId: string, siftId: string | undefined, strip: string) {
  if (siftId === undefined) {
    const frames = [...strip].flatMap((mark, k) => (mark === "h" ? [] : [k + 1]));
    return { frames, weights: null };
  }
  const sift = await findSift(siftId).catch(() => null);
  if (sift?.ensembleId !== ensembleId) throw invalid("sift", `This ensemble has no sift "${siftId}".`);
  const { kept } = await needResult(sift);
  return {
    frames: kept.map(({ frame }) => frame),
    // Where copies could not be counted the mirror factor stands for them, as in its populations.
    weights: kept.map(({ copies, degeneracy }) => copies ?? degeneracy),
  };
}

/** Energies of some frames in kcal/mol above the lowest of them: subtracted in their own unit, converted once. */
async function energiesOf(level: LevelView, frameCount: number) {
  const { values, present } = await loadColumn(level.id, frameCount);
  const unit = ENERGY_UNITS.find((one) => one === level.unit);
  if (unit === undefined) throw new Error(`Level ${level.id} has the unit ${level.unit}.`);
  const factor = kcalPer(unit);
  return {
    has: (frame: number) => present[frame - 1] === 1,
    above(frames: readonly number[]): Float64Array {
      let lowest = Number.POSITIVE_INFINITY;
      for (const frame of frames) lowest = Math.min(lowest, values[frame - 1] ?? lowest);
      return Float64Array.from(frames, (frame) => ((values[frame - 1] ?? lowest) - lowest) * factor);
    },
  };
}

/**
 * Two levels on the frames that have both energies: of a sift its kept ones, weighted by copies, else all accepted, each
 * once.
 *
 * @throws DomainError invalid for an unknown level or sift, and where no frame has both; conflict while the sift runs
 */
export async function compareLevelsOf(options: {
  actor: Actor;
  ensembleId: string;
  level: string;
  reference: string;
  sift?: string;
  temperature?: number;
  align?: Alignment;
}): Promise<ComparisonAnswer> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const strip = await frameStrip(ensembleId);
  const levels = toLevels(await findColumns(ensembleId, strip));
  const level = levelOf(levels, options.level, "level");
  const reference = levelOf(levels, options.reference, "reference");
  const { frames, weights } = await framesOf(ensembleId, options.sift, strip);
  const [a, b] = await Promise.all([energiesOf(level, strip.length), energiesOf(reference, strip.length)]);
  const rows = frames.flatMap((frame, row) => (a.has(frame) && b.has(frame) ? [row] : []));
  const both = rows.map((row) => frames[row] ?? 0);
  if (both.length === 0) {
    throw invalid("reference", `No frame has an energy at both "${level.name}" and "${reference.name}".`);
  }
  const temperature = options.temperature ?? STANDARD_TEMPERATURE_K;
  const found = compareLevels({
    level: a.above(both),
    reference: b.above(both),
    temperatureK: temperature,
    align: options.align,
    ...(weights === null ? {} : { weights: rows.map((row) => weights[row] ?? 1) }),
  });
  const { align, n, msd, mad, rmsd, sd, max, pearson, spearman, kendall } = found;
  return {
    level: level.id,
    reference: reference.id,
    temperature,
    align,
    sift: options.sift ?? null,
    ...{ n, msd, mad, rmsd, sd, max, pearson, spearman, kendall },
    maxFrame: both[found.maxPlace] ?? 1,
    populationOverlap: found.populationOverlap,
    jensenShannon: found.jensenShannon,
    window: found.window.map(({ share, kcal, count }) => ({ share, kcal, count })),
  };
}
