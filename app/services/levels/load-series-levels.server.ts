import { commonPair } from "../../lib/levels/better-level.ts";
import { chooseWeights } from "../../lib/thermo/populations.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import type { LevelView } from "../../lib/views.ts";
import type { Actor } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns, loadColumn, toLevels } from "../ensembles/find-columns.server.ts";
import { listEnsembles } from "../ensembles/list-ensembles.server.ts";
import { readResult } from "../sifts/find-sift.server.ts";

/** More molecules than this at once would make the page wait; the newest are taken and the rest counted. */
const MOST_MOLECULES = 200;

export interface SeriesMolecule {
  ensembleId: string;
  name: string;
  /** Ids of the two levels in this ensemble. */
  ids: { level: string; reference: string };
  /** Conformers of its distinct set that have both energies: kcal/mol, any zero. */
  level: number[];
  reference: number[];
  weights: number[];
  /** What they are. */
  weighedBy: "copies" | "degeneracy";
}

export interface SeriesLevels {
  /** Names of levels, those that most ensembles have first. */
  names: { name: string; ensembles: number }[];
  level: string | null;
  reference: string | null;
  molecules: SeriesMolecule[];
  /** Ensembles that do not count, with the reason. */
  left: { ensembleId: string; name: string; why: string }[];
}

/**
 * Two levels over all molecules of a series, matched by the names of the levels.
 *
 * @param options.series id of a series; all of the team where left out
 * @param options.level, options.reference names; where left out the pair that the ensembles propose and most of them have
 */
export async function loadSeriesLevels(options: {
  actor: Actor;
  teamId: string;
  series?: string;
  level?: string;
  reference?: string;
}): Promise<SeriesLevels> {
  const rows = await listEnsembles(options);
  const names = countNames(rows.map((row) => row.levels.map((level) => level.name)));
  const known = (name: string | undefined) => names.find((one) => one.name === name)?.name;
  const proposed = commonPair(rows.map((row) => [...row.levels].sort((a, b) => a.ordinal - b.ordinal)));
  const level = known(options.level) ?? proposed?.find((name) => name !== options.reference) ?? null;
  const reference = known(options.reference) ?? proposed?.toReversed().find((name) => name !== level) ?? null;
  const found: SeriesLevels = { names, level, reference, molecules: [], left: [] };
  if (level === null || reference === null || level === reference) return found;
  for (const row of rows.slice(0, MOST_MOLECULES)) {
    const leave = (why: string) => found.left.push({ ensembleId: row.id, name: row.name, why });
    const has = new Set(row.levels.map((one) => one.name));
    if (!has.has(level)) leave(`no energies at ${level}`);
    else if (!has.has(reference)) leave(`no energies at ${reference}`);
    else if (row.sift === null || row.sift.status !== "done") leave("not sifted");
    else {
      const molecule = await loadMolecule(row.id, row.sift.id, level, reference);
      if (molecule === null) leave("no conformer has both energies");
      else found.molecules.push({ ensembleId: row.id, name: row.name, ...molecule });
    }
  }
  for (const row of rows.slice(MOST_MOLECULES)) {
    found.left.push({ ensembleId: row.id, name: row.name, why: `beyond the newest ${MOST_MOLECULES}` });
  }
  return found;
}

function countNames(lists: readonly string[][]): SeriesLevels["names"] {
  const counts = new Map<string, number>();
  for (const list of lists) for (const name of list) counts.set(name, (counts.get(name) ?? 0) + 1);
  return Array.from(counts, ([name, ensembles]) => ({ name, ensembles })).sort(
    (a, b) => b.ensembles - a.ensembles || (a.name < b.name ? -1 : 1),
  );
}

async function loadMolecule(
  ensembleId: string,
  siftId: string,
  level: string,
  reference: string,
): Promise<Omit<SeriesMolecule, "ensembleId" | "name"> | null> {
  const result = await readResult(siftId);
  if (result === null) return null;
  const strip = await frameStrip(ensembleId);
  const levels = toLevels(await findColumns(ensembleId, strip));
  const [a, b] = await Promise.all([level, reference].map((name) => energiesOf(levels, name, strip.length)));
  if (!a || !b) return null;
  const kind = levels.find(({ name }) => name === reference)?.energyKind ?? "electronic";
  const { values: weights, kind: weighedBy } = chooseWeights(result.kept, kind);
  const idOf = (name: string) => levels.find((one) => one.name === name)?.id ?? "";
  const ids = { level: idOf(level), reference: idOf(reference) };
  const molecule = {
    ids,
    weighedBy,
    level: [] as number[],
    reference: [] as number[],
    weights: [] as number[],
  };
  for (const [k, { frame }] of result.kept.entries()) {
    const [x, y] = [a(frame), b(frame)];
    if (x === null || y === null) continue;
    molecule.level.push(x);
    molecule.reference.push(y);
    molecule.weights.push(weights[k] ?? 1);
  }
  return molecule.level.length === 0 ? null : molecule;
}

/** Energy of a frame in kcal/mol above the first value; null where it has none. */
async function energiesOf(
  levels: readonly LevelView[],
  name: string,
  frames: number,
): Promise<((frame: number) => number | null) | null> {
  const level = levels.find((one) => one.name === name);
  const unit = ENERGY_UNITS.find((one) => one === level?.unit);
  if (!level || !unit) return null;
  const { values, present } = await loadColumn(level.id, frames);
  const zero = values[present.indexOf(1)] ?? 0;
  const factor = kcalPer(unit);
  return (frame) => (present[frame - 1] === 1 ? ((values[frame - 1] ?? 0) - zero) * factor : null);
}
