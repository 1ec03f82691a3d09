import { type LevelEnergiesView, packEnergies } from "../../lib/levels/level-energies.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns, loadColumn, toLevels } from "../ensembles/find-columns.server.ts";

/**
 * Energies of every level of an ensemble over its accepted frames, for the page to compare: kcal/mol above the lowest
 * accepted frame of each. Subtracted in the source's unit first, converted once.
 */
export async function loadLevelEnergies(options: {
  actor: Actor;
  ensembleId: string;
}): Promise<LevelEnergiesView[]> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const strip = await frameStrip(ensembleId);
  const levels = toLevels(await findColumns(ensembleId, strip));
  return Promise.all(
    levels.map(async ({ id, unit }) => {
      const { values, present } = await loadColumn(id, strip.length);
      const known = ENERGY_UNITS.find((one) => one === unit);
      if (known === undefined) throw new Error(`Level ${id} has the unit ${unit}.`);
      const factor = kcalPer(known);
      let lowest = Number.POSITIVE_INFINITY;
      for (let i = 0; i < strip.length; i++) {
        if (strip[i] === "h") present[i] = 0;
        if (present[i] === 1) lowest = Math.min(lowest, values[i] ?? lowest);
      }
      const relative = values.map((value, i) => (present[i] === 1 ? (value - lowest) * factor : 0));
      return packEnergies(id, { values: relative, present });
    }),
  );
}
