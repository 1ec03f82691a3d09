import type { KeptConformer } from "../recipe/result.ts";
import type { EnergyKind } from "../views.ts";
import { type Weighed, weigh } from "./boltzmann.ts";

export interface ChosenWeights {
  /** Never "auto": what was taken. */
  kind: "copies" | "degeneracy";
  values: Float64Array;
  /** One sentence: which weight and why. */
  reason: string;
}

/**
 * The number of equal-energy copies that each kept conformer stands for.
 *
 * Energies without rotation count a conformer once for each way its identical groups can be exchanged (`copies`, the
 * mirror factor over the symmetry number); free energies already hold the symmetry number, so that only the mirror
 * factor remains (`degeneracy`). Where a symmetry number is not known, `degeneracy` is taken.
 *
 * @example chooseWeights(kept, "electronic", "auto").kind // "copies"
 */
export function chooseWeights(
  kept: readonly KeptConformer[],
  energyKind: EnergyKind,
  asked: "auto" | "copies" | "degeneracy" = "auto",
): ChosenWeights {
  const known = kept.every((conformer) => conformer.copies !== null);
  const { kind, reason } = decide(energyKind, asked, known);
  return {
    kind,
    reason,
    values: Float64Array.from(kept, (c) => (kind === "copies" ? (c.copies ?? c.degeneracy) : c.degeneracy)),
  };
}

function decide(
  energyKind: EnergyKind,
  asked: "auto" | "copies" | "degeneracy",
  known: boolean,
): { kind: "copies" | "degeneracy"; reason: string } {
  if (asked === "degeneracy") {
    return { kind: "degeneracy", reason: "Weighted by degeneracy, the mirror factor alone, as you chose." };
  }
  if (!known) {
    return {
      kind: "degeneracy",
      reason:
        "Weighted by degeneracy: the symmetry number of a conformer could not be counted within the bound on the work.",
    };
  }
  if (asked === "copies") {
    return { kind: "copies", reason: "Weighted by copies, degeneracy over symmetry number, as you chose." };
  }
  return energyKind === "free"
    ? {
        kind: "degeneracy",
        reason: "Weighted by degeneracy: a free energy already holds the symmetry number.",
      }
    : {
        kind: "copies",
        reason:
          "Weighted by copies: these energies do not hold the symmetry number, so degeneracy is divided by it.",
      };
}

export interface DistinctPopulations extends Weighed {
  weights: ChosenWeights;
}

/**
 * Populations and conformational thermodynamics of a distinct set at one temperature.
 *
 * @returns null where there is nothing to weigh: no conformer, or a set without energies
 * @throws RangeError on a temperature not above zero
 */
export function distinctPopulations(
  kept: readonly KeptConformer[],
  energyKind: EnergyKind,
  temperatureK: number,
  asked: "auto" | "copies" | "degeneracy" = "auto",
): DistinctPopulations | null {
  if (kept.length === 0) return null;
  const energies = new Float64Array(kept.length);
  for (let i = 0; i < kept.length; i++) {
    const energy = kept[i]!.relativeEnergy;
    if (energy === null) return null;
    energies[i] = energy;
  }
  const weights = chooseWeights(kept, energyKind, asked);
  return { ...weigh(energies, weights.values, temperatureK), weights };
}
