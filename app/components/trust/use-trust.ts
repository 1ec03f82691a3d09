import { useDeferredValue, useMemo } from "react";
import { useLevelError, useWeighed, type WeighedConformers } from "~/components/averages/use-weighed";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useWholeEnsemble } from "~/hooks/use-whole-ensemble";
import type { AveragesView } from "~/lib/averages/averages-view";
import { DEFAULT_SEED } from "~/lib/averages/uncertainty";
import { WIDE_RMSD_TOLERANCE } from "~/lib/recipe/recipe";
import { weigh } from "~/lib/thermo/boltzmann";
import { chooseWeights } from "~/lib/thermo/populations";
import { drawFigures } from "~/lib/trust/drawn-figures";
import { DRAWS } from "~/lib/trust/energy-draws";
import { type TrustFinding, type TrustInput, trustFindings, trustHeadline } from "~/lib/trust/findings";
import { populationError } from "~/lib/trust/population-error";
import { samplingCoverage } from "~/lib/trust/sampling-coverage";
import { compareSearches, foundBySearch, halvesOf, handsFound, type SearchFound } from "~/lib/trust/searches";
import type { TrustView } from "~/lib/trust/trust-view";
import { thermalEnergyKcal } from "~/lib/units";
import { conformerName, outsideWindow } from "~/lib/workbench/conformers";
import { nearMirror } from "~/lib/workbench/findings";

/** Populations kept for quantiles in a browser: 16 MB. */
const MOST_VALUES = 4_000_000;

export interface Trust {
  weighed: WeighedConformers;
  input: TrustInput;
  findings: TrustFinding[];
  headline: { text: string; second: string };
  /** Searches of their own, or the two halves of a lone one. */
  searches: { found: SearchFound[]; halves: boolean };
  populations: Float64Array;
  draws: number;
  seed: number;
}

/** Everything the section on trust shows, computed in the browser; null without energies or before there is a set. */
export function useTrust(
  averages: AveragesView,
  trust: TrustView,
): (Trust & { error: ReturnType<typeof useLevelError> }) | null {
  const { result, sift, ensemble, temperatureK, rows, state } = useWorkbench();
  const weighed = useWeighed(averages);
  const error = useLevelError(averages, weighed);
  const tolerance = useTolerance();
  // Ten thousand draws may lag behind the slider.
  const kelvin = useDeferredValue(temperatureK);
  const drawn = useMemo(() => {
    if (weighed === null || error.sigma === null) return null;
    const draws = 2 * Math.floor(Math.min(DRAWS, Math.max(1000, MOST_VALUES / weighed.energies.length)) / 2);
    const input = {
      energies: weighed.energies,
      weights: weighed.weights.values,
      temperatureK: kelvin,
      error: { sigma: error.sigma },
      seed: DEFAULT_SEED,
      draws,
    };
    const found = populationError(input);
    const set = found.lowestSet.slice(0, 12);
    const [top] = drawFigures(input, 1, (populations, _energies, out) => {
      out[0] = set.reduce((total, place) => total + (populations[place] ?? 0), 0);
    }).figures;
    return { found, top: top ? { count: set.length, low: top.low, high: top.high } : null };
  }, [weighed, error.sigma, kelvin]);
  return useMemo(() => {
    if (weighed === null || result === null || sift === null) return null;
    const populations = weighed.populationsAt(temperatureK);
    const names = weighed.places.map(conformerName);
    const lone = trust.searches.length < 2;
    const searches = foundBySearch(result, lone ? halvesOf(ensemble.frames) : trust.searches);
    const outside = outsideWindow(rows);
    const rt = thermalEnergyKcal(temperatureK);
    const bound = (kcal: number) => Math.exp(-kcal / rt);
    const populationOf = new Map(weighed.kept.map(({ frame }, k) => [frame, populations[k] ?? 0]));
    const input: TrustInput = {
      names,
      energies: weighed.energies,
      populations,
      found: weighed.kept.map((conformer) => conformer.found),
      temperatureK,
      level: {
        name: weighed.level.name,
        energyKind: weighed.level.energyKind,
        temperatureK: weighed.level.temperature,
      },
      error: drawn === null || error.sigma === null ? null : { sigmaKcal: error.sigma, drawn: drawn.found },
      others: ensemble.levels
        .filter((level) => level.id !== weighed.level.id)
        .map((level) => {
          const energies = weighed.places.map((place) =>
            level.id === sift.recipe.level
              ? (result.kept[place]?.relativeEnergy ?? null)
              : (averages.levels.find((one) => one.id === level.id)?.energies[place] ?? null),
          );
          return {
            id: level.id,
            name: level.name,
            energies,
            populations: populationsOf(energies, weighed, level.energyKind, temperatureK, state.weights),
          };
        }),
      // Where different shapes merge, how often each was found says nothing of shapes.
      coverage:
        sift.recipe.rmsdTolerance > WIDE_RMSD_TOLERANCE
          ? null
          : samplingCoverage(result.kept.map((conformer) => conformer.found)),
      searches: lone ? null : compareSearches(searches),
      hands: handsFound(result).flatMap((count) => {
        const place = weighed.places.indexOf(count.place);
        return place < 0 ? [] : [{ ...count, place }];
      }),
      window:
        state.windowKcal === null
          ? null
          : { kcal: state.windowKcal, ...outside, bound: bound(state.windowKcal) },
      cut:
        sift.recipe.window === null
          ? null
          : {
              kcal: sift.recipe.window,
              frames: result.outsideWindow.length,
              bound: bound(sift.recipe.window),
            },
      held: result.held,
      nearMirror: nearMirror(result, sift.recipe).map(({ frame, name, rmsd }) => ({
        name,
        rmsd,
        population: populationOf.get(frame) ?? 0,
      })),
      chirality: sift.recipe.chiralityOverridden ? sift.recipe.chirality : ensemble.chirality,
      tolerance,
    };
    const findings = trustFindings(input);
    return {
      weighed,
      error,
      input,
      findings,
      headline: trustHeadline(input, findings, drawn?.top ?? null),
      searches: { found: searches, halves: lone },
      populations,
      draws: drawn?.found.draws ?? 0,
      seed: DEFAULT_SEED,
    };
  }, [
    weighed,
    result,
    sift,
    temperatureK,
    trust,
    ensemble,
    rows,
    state,
    drawn,
    error,
    averages.levels,
    tolerance,
  ]);
}

/** Populations of another level over the same conformers; those without an energy get none. */
function populationsOf(
  energies: readonly (number | null)[],
  weighed: WeighedConformers,
  kind: Parameters<typeof chooseWeights>[1],
  temperatureK: number,
  asked: Parameters<typeof chooseWeights>[2],
): Float64Array | null {
  const having = energies.flatMap((energy, k) => (energy === null ? [] : [k]));
  if (having.length === 0) return null;
  const weights = chooseWeights(weighed.kept, kind, asked).values;
  const shares = weigh(
    having.map((k) => energies[k] ?? 0),
    having.map((k) => weights[k] ?? 1),
    temperatureK,
  ).populations;
  const all = new Float64Array(energies.length);
  for (const [row, k] of having.entries()) all[k] = shares[row] ?? 0;
  return all;
}

/** Distinct conformers at about half and twice the tolerance, counted in a thread of the browser; null until then. */
function useTolerance(): TrustInput["tolerance"] {
  const { ensemble, sift, result } = useWorkbench();
  const shown = useMemo(
    () =>
      sift !== null && result !== null && sift.current
        ? // Not "current" for the thread: how near the kept ones lie is not asked here.
          { id: sift.id, recipe: sift.recipe, kept: [], current: false }
        : null,
    [sift, result],
  );
  const { plateau } = useWholeEnsemble(ensemble, shown, shown === null ? null : shown.recipe);
  return useMemo(() => {
    if (plateau === null || sift === null || result === null) return null;
    const { counts } = plateau;
    const at = sift.recipe.rmsdTolerance;
    const row = counts.counts[Math.max(0, counts.energyFactors.indexOf(1))] ?? [];
    const nearest = (wanted: number): [number, number] | null => {
      let best: number | null = null;
      for (const [k, tolerance] of counts.rmsdTolerances.entries()) {
        if (tolerance === at) continue;
        const before = best === null ? null : (counts.rmsdTolerances[best] ?? null);
        if (before === null || Math.abs(tolerance - wanted) < Math.abs(before - wanted)) best = k;
      }
      const count = best === null ? undefined : row[best];
      return best === null || count === undefined ? null : [counts.rmsdTolerances[best] ?? wanted, count];
    };
    const half = nearest(at / 2);
    const double = nearest(2 * at);
    return half === null || double === null ? null : { at, now: result.kept.length, half, double };
  }, [plateau, sift, result]);
}
