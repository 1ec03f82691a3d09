import { useMemo } from "react";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { AveragesView } from "~/lib/averages/averages-view";
import type { KeptConformer } from "~/lib/recipe/result";
import { sampleSd } from "~/lib/stats/moments";
import { weigh } from "~/lib/thermo/boltzmann";
import { type ChosenWeights, chooseWeights } from "~/lib/thermo/populations";
import type { LevelView } from "~/lib/views";
import { useAveragesState } from "./use-averages-state";

/** The conformers that a level weighs, in the order of the set. */
export interface WeighedConformers {
  level: LevelView;
  /** Positions in the distinct set of those that have an energy. */
  places: number[];
  kept: KeptConformer[];
  /** kcal/mol above the lowest of them. */
  energies: Float64Array;
  weights: ChosenWeights;
  /** Conformers of the set without an energy at this level. */
  without: number;
  populationsAt: (temperatureK: number) => Float64Array;
}

/** The set as the chosen level weighs it; null without energies or before there is a set. */
export function useWeighed(view: AveragesView): WeighedConformers | null {
  const { result, level: own, ensemble, state } = useWorkbench();
  const [{ by }] = useAveragesState();
  return useMemo(() => {
    if (result === null || own === null) return null;
    const other = by === null || by === own.id ? null : (view.levels.find((one) => one.id === by) ?? null);
    const level = (other && ensemble.levels.find((one) => one.id === other.id)) ?? own;
    const energyOf = (place: number) =>
      other ? (other.energies[place] ?? null) : (result.kept[place]?.relativeEnergy ?? null);
    const places = result.kept.flatMap((_, place) => (energyOf(place) === null ? [] : [place]));
    const kept = places.flatMap((place) => result.kept[place] ?? []);
    if (kept.length === 0) return null;
    const energies = Float64Array.from(places, (place) => energyOf(place) ?? 0);
    const weights = chooseWeights(kept, level.energyKind, state.weights);
    return {
      level,
      places,
      kept,
      energies,
      weights,
      without: result.kept.length - kept.length,
      populationsAt: (temperatureK: number) => weigh(energies, weights.values, temperatureK).populations,
    };
  }, [result, own, by, view.levels, ensemble.levels, state.weights]);
}

export interface LevelError {
  /** kcal/mol; null where it cannot be taken. */
  sigma: number | null;
  /** The level it was taken against, where it was. */
  against: LevelView | null;
  /** Errors that could be taken: by each other level, over the conformers with both energies. */
  offers: { level: LevelView; sd: number; n: number }[];
}

/**
 * The error of the level: typed in, or the standard deviation (n - 1) of its deviations from another level about their
 * mean, over the conformers that have both energies.
 */
export function useLevelError(view: AveragesView, weighed: WeighedConformers | null): LevelError {
  const { ensemble, result, level: own } = useWorkbench();
  const [{ sigmaKcal, sigmaFrom }] = useAveragesState();
  return useMemo(() => {
    const offers = ensemble.levels.flatMap((level) => {
      if (weighed === null || level.id === weighed.level.id) return [];
      const energies =
        level.id === own?.id
          ? (result?.kept.map((conformer) => conformer.relativeEnergy) ?? [])
          : view.levels.find((one) => one.id === level.id)?.energies;
      const differences = weighed.places.flatMap((place, k) => {
        const energy = energies?.[place] ?? null;
        return energy === null ? [] : [(weighed.energies[k] ?? 0) - energy];
      });
      const sd = differences.length >= 3 ? sampleSd(differences) : null;
      return sd === null ? [] : [{ level, sd, n: differences.length }];
    });
    const offer = offers.find((one) => one.level.id === sigmaFrom) ?? null;
    return { sigma: offer?.sd ?? sigmaKcal, against: offer?.level ?? null, offers };
  }, [ensemble.levels, weighed, own, result, view.levels, sigmaKcal, sigmaFrom]);
}
