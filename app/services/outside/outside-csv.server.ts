import { db } from "../../db/client.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { OutsideChoice } from "../../lib/outside/choice.ts";
import { nearestRows } from "../../lib/outside/finding.ts";
import { conformerName } from "../../lib/workbench/conformers.ts";
import { ATOM_SET_WORDS } from "../../lib/workbench/recipe-words.ts";
import { toCsv } from "../../lib/workbench/tsv.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { findSift } from "../sifts/find-sift.server.ts";
import { loadPopulations, needResult } from "../sifts/populations.server.ts";
import { compareOutside } from "./compare-outside.server.ts";
import { listOutside } from "./list-outside.server.ts";

const HEAD = [
  "structure",
  "atoms compared",
  "conformer",
  "frame",
  "RMSD [Å]",
  "as",
  "other hand RMSD [Å]",
  "upper bound",
  "relative energy [kcal/mol]",
  "population",
  "energy of the structure above the lowest [kcal/mol]",
];

/**
 * The conformers of a distinct set as they lie to structures from outside, nearest first, as CSV; members' exports stand
 * in the logbook.
 *
 * @param options.choice its `outside` names one structure; null takes all, the oldest first
 * @throws DomainError conflict while the sift is not done, not-found for a structure that is not there
 */
export async function exportOutside(options: {
  actor: Actor;
  siftId: string;
  choice: Pick<OutsideChoice, "outside" | "set" | "mirror">;
  temperature?: number;
  weights?: "auto" | "copies" | "degeneracy";
}): Promise<{ name: string; text: string }> {
  const { actor, choice } = options;
  const grant = await accessSift(actor, "read", options.siftId);
  const { ensembleId } = grant;
  const sift = await findSift(grant.siftId);
  const result = await needResult(sift);
  const { ensemble } = await findEnsembleRow(grant.teamId, ensembleId);
  const all = await listOutside(ensembleId);
  const chosen = choice.outside === null ? all : all.filter(({ id }) => id === choice.outside);
  if (choice.outside !== null && chosen.length === 0) throw notFound();
  const populations = await populationsOf(options, sift.recipe.level);
  const conformers = result.kept.map(({ frame, relativeEnergy }, index) => ({
    index,
    name: conformerName(index),
    frame,
    relativeEnergy,
    population: populations.get(frame) ?? null,
  }));
  const mirror = choice.mirror && ensemble.chirality === "achiral";
  const rows: (string | number | null)[][] = [];
  for (const outside of chosen) {
    const found = await compareOutside({ ensembleId, outside, sift: { id: sift.id, result }, choice });
    if (found === null) continue;
    const sameLevel = outside.strain?.levelId === sift.recipe.level && found.otherConfiguration.length === 0;
    const strain = sameLevel ? (outside.strain?.kcal ?? null) : null;
    for (const row of nearestRows(conformers, found, mirror)) {
      rows.push([
        outside.name,
        ATOM_SET_WORDS[found.set],
        row.name,
        row.frame,
        row.rmsd,
        row.mirror ? "mirror image" : "same hand",
        row.otherHand,
        row.exact ? "no" : "yes",
        row.relativeEnergy,
        row.population,
        strain,
      ]);
    }
  }
  if (grant.role !== "guest") {
    await writeEntry(db, grant, grant, { type: "export", data: { siftId: sift.id, format: "outside csv" } });
  }
  const [only] = chosen;
  const about = chosen.length === 1 && only ? `nearest to ${only.name}` : "outside structures";
  return { name: `${ensemble.name} ${about}.csv`, text: toCsv(HEAD, rows) };
}

/** Populations by frame; none where nothing weighs the set. */
async function populationsOf(
  options: Parameters<typeof loadPopulations>[0],
  level: string | null,
): Promise<ReadonlyMap<number, number>> {
  if (level === null) return new Map();
  try {
    const { conformers } = await loadPopulations(options);
    return new Map(conformers.map(({ frame, population }) => [frame, population]));
  } catch (error) {
    if (error instanceof DomainError && error.code === "invalid") return new Map();
    throw error;
  }
}
