import { db } from "../../db/client.server.ts";
import type { PopulationsAnswer } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import type { KeptConformer, SiftResult } from "../../lib/recipe/result.ts";
import { distinctPopulations } from "../../lib/thermo/populations.ts";
import { temperatureWarning } from "../../lib/thermo/temperature-warning.ts";
import { ENERGY_UNITS, kcalPer, STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import type { LevelView } from "../../lib/views.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns, loadColumn, pickLevel, toLevels } from "../ensembles/find-columns.server.ts";
import { levelWarnings } from "../ensembles/judge-spread.server.ts";
import { type FoundSift, findSift, readResult } from "./find-sift.server.ts";
import { checkStands, siftWarnings } from "./standing.server.ts";

/** The result of a sift that is done; 409 for one that is not, and where energies or structures were read again since. */
export async function needResult(sift: FoundSift): Promise<SiftResult> {
  const result = sift.status === "done" ? await readResult(sift.id) : null;
  if (result !== null) {
    await checkStands(sift, result.kept);
    return result;
  }
  const why = {
    queued: "It waits for its turn. Ask again with wait=30 at the sift itself.",
    running: "It is still being computed. Ask again with wait=30 at the sift itself.",
    failed: "It failed. Ask for it again.",
    cancelled: "It was cancelled. Ask for it again.",
    done: "Its result is not there. Ask for it again.",
  }[sift.status];
  throw new DomainError("conflict", "The sift is not done", `This sift has no result yet. ${why}`, {
    extra: { sift: { status: sift.status, progress: sift.progress } },
  });
}

function invalid(field: string, message: string): DomainError {
  return new DomainError("invalid", "No populations", message, { faults: [{ field, message }] });
}

/** The level that weighs the set: the one asked for, else that of the sift. */
export function levelOf(sift: FoundSift, levels: LevelView[], asked: string | undefined): LevelView {
  if (sift.recipe.level === null) {
    throw invalid(
      "level",
      "This sift ran without energies, in file order, so nothing weighs its conformers. Sift with a level.",
    );
  }
  if (asked !== undefined) return pickLevel(levels, asked);
  const own = levels.find((level) => level.id === sift.recipe.level);
  if (own) return own;
  throw new DomainError(
    "conflict",
    "The level is no more",
    `The level "${sift.recipe.levelName}" of this sift was removed, or its files were read again under another name. Sift again.`,
  );
}

/** Kept conformers that have an energy at a level, relative to the lowest of them, and the frames that have none. */
export async function energiesAt(
  sift: FoundSift,
  kept: readonly KeptConformer[],
  level: LevelView,
  frames: number,
): Promise<{ conformers: KeptConformer[]; withoutEnergy: number[] }> {
  // The sift's own numbers stand as they were computed, whatever happened to the column since.
  if (level.id === sift.recipe.level) return { conformers: [...kept], withoutEnergy: [] };
  const { values, present } = await loadColumn(level.id, frames);
  const having = kept.filter(({ frame }) => present[frame - 1] === 1);
  const unit = ENERGY_UNITS.find((one) => one === level.unit);
  if (unit === undefined) throw new Error(`Level ${level.id} has the unit ${level.unit}.`);
  const lowest = having.reduce(
    (least, { frame }) => Math.min(least, values[frame - 1] ?? 0),
    Number.POSITIVE_INFINITY,
  );
  return {
    conformers: having.map((conformer) => ({
      ...conformer,
      relativeEnergy: ((values[conformer.frame - 1] ?? 0) - lowest) * kcalPer(unit),
    })),
    withoutEnergy: kept.filter(({ frame }) => present[frame - 1] !== 1).map(({ frame }) => frame),
  };
}

/**
 * Populations and conformational thermodynamics of a distinct set.
 *
 * @throws DomainError conflict while the sift is not done, and where its energies or structures were read again or replaced
 *   since; invalid for an unknown level and for a sift without energies
 */
export async function loadPopulations(options: {
  actor: Actor;
  siftId: string;
  temperature?: number;
  level?: string;
  weights?: "auto" | "copies" | "degeneracy";
}): Promise<PopulationsAnswer> {
  const grant = await accessSift(options.actor, "read", options.siftId);
  const sift = await findSift(grant.siftId);
  const strip = await frameStrip(grant.ensembleId);
  const level = levelOf(sift, toLevels(await findColumns(grant.ensembleId, strip)), options.level);
  const result = await needResult(sift);
  const { conformers, withoutEnergy } = await energiesAt(sift, result.kept, level, strip.length);
  const temperature = options.temperature ?? STANDARD_TEMPERATURE_K;
  const weighed = distinctPopulations(conformers, level.energyKind, temperature, options.weights ?? "auto");
  if (weighed === null) {
    throw invalid("level", `No conformer of this distinct set has an energy at "${level.name}".`);
  }
  const warning = temperatureWarning(level, temperature);
  const known = await siftWarnings(sift, result);
  if (level.id !== sift.recipe.level) known.push(...(await levelWarnings(db, grant.ensembleId, level.id)));
  return {
    temperature,
    level: level.id,
    levelName: level.name,
    weights: weighed.weights.kind,
    weightsReason: weighed.weights.reason,
    conformers: conformers.map(({ frame, relativeEnergy }, row) => ({
      frame,
      relativeEnergy: relativeEnergy ?? 0,
      weight: weighed.weights.values[row] ?? 0,
      population: weighed.populations[row] ?? 0,
    })),
    withoutEnergy,
    freeEnergy: weighed.freeEnergy,
    energy: weighed.energy,
    entropy: weighed.entropy,
    heatCapacity: weighed.heatCapacity,
    effectiveCount: weighed.effectiveCount,
    warnings: [...(warning === null ? [] : [{ code: "E13", message: warning }]), ...known],
  };
}
