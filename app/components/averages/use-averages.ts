import { useDeferredValue, useMemo } from "react";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useLevelTask } from "~/hooks/use-level-task";
import { type Average, averageOf, type Moments } from "~/lib/averages/average";
import type { AveragesView } from "~/lib/averages/averages-view";
import { type Contribution, contributionsOf, mostMoving } from "~/lib/averages/contributions";
import type { AverageFacts } from "~/lib/averages/measured-csv";
import {
  averageErrorsOf,
  DRAWN_AT_ONCE,
  drawWork,
  type PropertyValues,
  propertyMoments,
} from "~/lib/averages/property-set";
import { type AverageError, DEFAULT_SEED } from "~/lib/averages/uncertainty";
import { conformerName } from "~/lib/workbench/conformers";
import { useAveragesState } from "./use-averages-state";
import type { WeighedConformers } from "./use-weighed";

/** A property with its averages at the temperatures shown. */
export interface AveragedProperty {
  property: PropertyValues;
  moments: Moments;
  /** In the order of the temperatures. */
  averages: Average[];
  /** At the temperature set. */
  average: Average;
  /** Null without a level error, or where there is no value. */
  error: AverageError | null;
}

export interface Averaged {
  properties: AveragedProperty[];
  temperatures: number[];
  /** Place of the temperature set among them. */
  here: number;
  populations: Float64Array;
  draws: number | null;
  seed: number;
}

/** What averages belong to, as files that leave the page say it. */
export function averageFacts(
  { draws, seed }: Averaged,
  { level, weights }: WeighedConformers,
  { temperatureK, sigma }: { temperatureK: number; sigma: number | null },
): AverageFacts {
  return {
    temperatureK,
    level: level.name,
    weights: weights.kind,
    ...(draws === null ? { sigma: null, draws: null, seed: null } : { sigma, draws, seed }),
  };
}

/** Averages of every property at every temperature shown, with the uncertainty that the level's error makes. */
export function useAverages(
  view: AveragesView,
  weighed: WeighedConformers | null,
  sigma: number | null,
): Averaged | null {
  const { temperatureK, sift } = useWorkbench();
  const [{ temperatures: chosen }] = useAveragesState();
  const merged = sift?.recipe.mirror === "merge" && sift.recipe.chirality === "achiral";
  const prepared = useMemo(
    () =>
      weighed === null
        ? []
        : view.properties.map((property) => {
            const own = {
              ...property,
              values: weighed.places.map((place) => property.values[place] ?? null),
            };
            return { property: own, moments: propertyMoments(own, weighed.kept, merged) };
          }),
    [view.properties, weighed, merged],
  );
  // Draws may lag behind the slider; the averages themselves do not.
  const settledK = useDeferredValue(temperatureK);
  const wanted = useMemo((): Parameters<typeof averageErrorsOf> | null => {
    if (weighed === null || sigma === null || prepared.length === 0) return null;
    return [
      prepared.map((one) => one.moments),
      { energies: weighed.energies, weights: weighed.weights.values, temperatureK: settledK },
      { sigma, seed: DEFAULT_SEED },
    ];
  }, [prepared, weighed, sigma, settledK]);
  const drawn = useDrawn(wanted);
  return useMemo(() => {
    if (weighed === null) return null;
    const temperatures = [...new Set([...chosen, temperatureK])].sort((a, b) => a - b);
    const populations = temperatures.map((kelvin) => weighed.populationsAt(kelvin));
    const here = temperatures.indexOf(temperatureK);
    return {
      temperatures,
      here,
      populations: populations[here] ?? new Float64Array(),
      draws: drawn?.draws ?? null,
      seed: DEFAULT_SEED,
      properties: prepared.flatMap(({ property, moments }, k): AveragedProperty[] => {
        const averages = populations.map((share) => averageOf(moments, share));
        const average = averages[here];
        return average ? [{ property, moments, averages, average, error: drawn?.errors[k] ?? null }] : [];
      }),
    };
  }, [weighed, chosen, temperatureK, prepared, drawn]);
}

/** Draws of small sets at once, of large ones on a thread: those are there a moment later. */
function useDrawn(wanted: Parameters<typeof averageErrorsOf> | null) {
  const large = wanted !== null && drawWork(wanted[1].energies.length, wanted[0].length) > DRAWN_AT_ONCE;
  const here = useMemo(() => (wanted === null || large ? null : averageErrorsOf(...wanted)), [wanted, large]);
  const apart = useLevelTask("averages", large ? wanted : null);
  return large ? apart : here;
}

export interface Mover {
  /** Position among the weighed conformers. */
  index: number;
  name: string;
  contribution: Contribution;
  change: number;
}

/** What each conformer does to an average, and the one that moves it most. */
export function contributionsTo(
  averaged: AveragedProperty,
  weighed: WeighedConformers,
  populations: Float64Array,
  temperatureK: number,
): { list: Contribution[]; mover: Mover | null } {
  const list = contributionsOf(averaged.moments, populations, temperatureK);
  const most = averaged.average.value === null ? null : mostMoving(list, averaged.average.value);
  const contribution = most === null ? undefined : list[most.index];
  return {
    list,
    mover:
      most === null || contribution === undefined
        ? null
        : {
            index: most.index,
            name: conformerName(weighed.places[most.index] ?? 0),
            contribution,
            change: most.change,
          },
  };
}
