import { type AveragesView, MAX_VALUES } from "../../lib/averages/averages-view.ts";
import type { KeptConformer } from "../../lib/recipe/result.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import type { LevelView } from "../../lib/views.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns, loadColumn, toLevels } from "../ensembles/find-columns.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { loadSift } from "../sifts/load-sift.server.ts";
import { saidView } from "./averaging.server.ts";
import { findProperties, propertyValues } from "./property-set.server.ts";

/**
 * Property columns and further energies over the conformers of the sift that a page shows; what moves with a slider is
 * computed in the browser from them.
 */
export async function loadAverages(options: {
  actor: Actor;
  ensembleId: string;
  siftId: string | null;
  /** False where only the energies are wanted. */
  properties?: boolean;
}): Promise<AveragesView> {
  const grant = await accessEnsemble(options.actor, "read", options.ensembleId);
  const [{ ensemble }, sift, found, said] = await Promise.all([
    findEnsembleRow(grant.teamId, grant.ensembleId),
    loadSift(options),
    findProperties(grant.ensembleId),
    saidView(grant.ensembleId, grant.role !== "guest"),
  ]);
  const kept = sift?.result?.kept ?? null;
  if (sift === null || kept === null)
    return {
      siftId: null,
      properties: [],
      counters: [],
      total: found.length,
      levels: [],
      said,
      isotopes: null,
    };
  const strip = await frameStrip(ensemble.id);
  const all = await findColumns(ensemble.id, strip);
  const counting = new Set(all.filter(({ counter }) => counter).map(({ id }) => id));
  const averaged = found.filter(({ id }) => !counting.has(id));
  const carried =
    options.properties === false
      ? []
      : averaged.slice(0, Math.max(1, Math.floor(MAX_VALUES / Math.max(1, kept.length))));
  const levels = toLevels(all);
  const { isotopes } = unpackMolecule(ensemble);
  return {
    said,
    isotopes: isotopes.some((mass) => mass !== 0) ? [...isotopes] : null,
    siftId: sift.id,
    properties: await propertyValues(ensemble, kept, carried),
    counters: found.filter(({ id }) => counting.has(id)).map(({ name }) => name),
    total: averaged.length,
    levels: await Promise.all(
      levels
        .filter((level) => level.id !== sift.recipe.level)
        .map(async (level) => ({ id: level.id, energies: await energiesOf(level, kept, strip.length) })),
    ),
  };
}

async function energiesOf(
  level: LevelView,
  kept: readonly KeptConformer[],
  frames: number,
): Promise<(number | null)[]> {
  const { values, present } = await loadColumn(level.id, frames);
  const unit = ENERGY_UNITS.find((one) => one === level.unit);
  if (unit === undefined) throw new Error(`Level ${level.id} has the unit ${level.unit}.`);
  const own = kept.map(({ frame }) => (present[frame - 1] === 1 ? (values[frame - 1] ?? null) : null));
  const lowest = own.reduce<number>(
    (least, value) => (value === null ? least : Math.min(least, value)),
    Number.POSITIVE_INFINITY,
  );
  return own.map((value) => (value === null ? null : (value - lowest) * kcalPer(unit)));
}
