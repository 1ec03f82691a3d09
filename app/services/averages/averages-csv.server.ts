import { db } from "../../db/client.server.ts";
import { averageOf } from "../../lib/averages/average.ts";
import { averagesCsv } from "../../lib/averages/averages-csv.ts";
import { averageErrorsOf, averagesRows, propertyMoments } from "../../lib/averages/property-set.ts";
import { DEFAULT_SEED } from "../../lib/averages/uncertainty.ts";
import { STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { findSift } from "../sifts/find-sift.server.ts";
import { findProperties, propertyValues } from "./property-set.server.ts";
import { mirrorMerged, weighedSet } from "./weighed-set.server.ts";

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
      : averageErrorsOf(
          moments,
          {
            energies: conformers.map((conformer) => conformer.relativeEnergy ?? 0),
            weights: weighed.weights.values,
            temperatureK,
          },
          { sigma: options.sigma, seed: DEFAULT_SEED },
        ).errors;
  if (grant.role !== "guest") {
    await writeEntry(db, grant, grant, {
      type: "export",
      data: { siftId: grant.siftId, format: "averages csv" },
    });
  }
  return {
    name: `${ensemble.name} averages.csv`,
    text: averagesCsv(averagesRows(properties, averages, errors)),
  };
}
