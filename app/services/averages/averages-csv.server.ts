import { db } from "../../db/client.server.ts";
import { averageOf } from "../../lib/averages/average.ts";
import { averagesCsv } from "../../lib/averages/averages-csv.ts";
import {
  averageErrorsOf,
  averagesRows,
  DRAWN_AT_ONCE,
  drawWork,
  propertyMoments,
} from "../../lib/averages/property-set.ts";
import { DEFAULT_SEED } from "../../lib/averages/uncertainty.ts";
import { formatTemperature } from "../../lib/format.ts";
import { STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { computeAverages } from "../jobs/pool.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { findSift } from "../sifts/find-sift.server.ts";
import { findProperties, propertyValues } from "./property-set.server.ts";
import { mirrorMerged, weighedSet } from "./weighed-set.server.ts";

/** What the error of the level makes of the averages; the same digits here and in a thread. */
async function errorsOf(...input: Parameters<typeof averageErrorsOf>) {
  const [moments, weighed, error] = input;
  if (drawWork(weighed.energies.length, moments.length) <= DRAWN_AT_ONCE) {
    return averageErrorsOf(moments, weighed, error).errors;
  }
  const { energies, weights, temperatureK } = weighed;
  const task = { energies: Float64Array.from(energies), weights: Float64Array.from(weights), temperatureK };
  return (await computeAverages({ moments, weighed: task, error })).errors;
}

/**
 * Boltzmann-weighted averages of all property columns of an ensemble over a distinct set, as `averages.csv`; members'
 * exports stand in the logbook.
 *
 * @param options.sigma error of the level in kcal/mol; without it no uncertainty is given
 * @throws DomainError conflict while the sift is not done; invalid for an unknown level or a sift without energies
 */
export async function exportAverages(options: {
  actor: Actor;
  siftId: string;
  temperature?: number;
  weights?: "auto" | "copies" | "degeneracy";
  sigma?: number;
  level?: string;
}): Promise<{ name: string; text: string }> {
  const grant = await accessSift(options.actor, "read", options.siftId);
  const sift = await findSift(grant.siftId);
  const { ensemble } = await findEnsembleRow(grant.teamId, grant.ensembleId);
  const temperatureK = options.temperature ?? STANDARD_TEMPERATURE_K;
  const { conformers, weighed } = await weighedSet(sift, { ...options, temperatureK });
  const properties = await propertyValues(ensemble, conformers, await findProperties(ensemble.id));
  const moments = properties.map((property) =>
    propertyMoments(property, conformers, mirrorMerged(sift.recipe)),
  );
  const averages = moments.map((one) => averageOf(one, weighed.populations));
  const errors =
    options.sigma === undefined || moments.length === 0
      ? null
      : await errorsOf(
          moments,
          {
            energies: Float64Array.from(conformers, (conformer) => conformer.relativeEnergy ?? 0),
            weights: Float64Array.from(weighed.weights.values),
            temperatureK,
          },
          { sigma: options.sigma, seed: DEFAULT_SEED },
        );
  if (grant.role !== "guest") {
    await writeEntry(db, grant, grant, {
      type: "export",
      data: { siftId: grant.siftId, format: "averages csv" },
    });
  }
  return {
    name: `${ensemble.name} averages ${formatTemperature(temperatureK)} K.csv`,
    text: averagesCsv(averagesRows(properties, averages, errors)),
  };
}
