import { formatCount, formatPercent, formatTemperature, plural, withUnit } from "../format.ts";
import { WIDE_RMSD_TOLERANCE } from "../recipe/recipe.ts";
import type { SiftResult } from "../recipe/result.ts";
import { samplingCoverage } from "../trust/sampling-coverage.ts";
import type { EnsembleView, SiftView } from "../views.ts";

export interface StationView {
  path: string;
  name: string;
  figure: string;
  state: "done" | "todo" | "care";
}

/** The sections of the workbench with their one figure each. */
export function stations(ensemble: EnsembleView, sift: SiftView | null, temperatureK: number): StationView[] {
  const ready = sift?.result ?? null;
  const weighed = ready !== null && sift?.recipe.level !== null;
  const running = sift !== null && (sift.status === "queued" || sift.status === "running");
  const ended = sift?.status === "failed" || sift?.status === "cancelled" ? sift.status : null;
  const waits = running ? "under way" : ensemble.openQuestions > 0 ? "after intake" : (ended ?? "not yet");
  const after = (figure: string): Pick<StationView, "figure" | "state"> =>
    ready === null ? { figure: waits, state: "todo" } : { figure, state: "done" };
  return [
    { path: "intake", name: "Intake", ...intakeStation(ensemble) },
    {
      path: "distinct-set",
      name: "Distinct set",
      ...after(
        ready
          ? `${formatCount(ready.kept.length)} of ${formatCount(ready.kept.length + ready.dropped.length)}`
          : "",
      ),
    },
    {
      path: "populations",
      name: "Populations",
      ...(weighed || ready === null
        ? after(withUnit(formatTemperature(temperatureK), "K"))
        : ({ figure: "no energies", state: "todo" } as const)),
    },
    { path: "levels", name: "Levels", ...levelsStation(ensemble) },
    {
      path: "averages",
      name: "Averages",
      ...(ensemble.properties === 0
        ? ({ figure: "no property", state: "todo" } as const)
        : after(plural(ensemble.properties, "property", "properties"))),
    },
    { path: "trust", name: "Trust", ...trustStation(ready, waits, sift) },
    { path: "hand-over", name: "Hand-over", ...after("CSV, XYZ, SDF, JSON") },
    { path: "logbook", name: "Logbook", figure: "who did what", state: "done" },
  ];
}

function trustStation(
  ready: SiftResult | null,
  waits: string,
  sift: SiftView | null,
): Pick<StationView, "figure" | "state"> {
  const coverage = samplingCoverage((ready?.kept ?? []).map(({ found }) => found));
  if (coverage === null) return { figure: waits, state: "todo" };
  // Merged into one, even different shapes were all found often.
  const wide = sift !== null && sift.recipe.rmsdTolerance > WIDE_RMSD_TOLERANCE;
  if (wide) return { figure: "wide tolerance", state: "care" };
  // All found once says nothing, and none found once is no proof that nothing is missing.
  const figure =
    coverage.once === coverage.hits
      ? "coverage not known"
      : coverage.once === 0
        ? "no sign of gaps"
        : `coverage ${formatPercent(coverage.coverage, coverage.coverage > 0.995 ? 1 : 0)}`;
  return { figure, state: "done" };
}

function levelsStation(ensemble: EnsembleView): Pick<StationView, "figure" | "state"> {
  const { length } = ensemble.levels;
  return {
    figure: length === 0 ? "no energies" : plural(length, "level"),
    state: length > 1 ? "done" : "todo",
  };
}

function intakeStation(ensemble: EnsembleView): Pick<StationView, "figure" | "state"> {
  if (ensemble.openQuestions > 0) {
    return { figure: `${plural(ensemble.openQuestions, "question")} open`, state: "care" };
  }
  const read = `${formatCount(ensemble.accepted)} of ${formatCount(ensemble.frames)}`;
  return ensemble.held > 0
    ? { figure: `${read}, ${formatCount(ensemble.held)} held`, state: "care" }
    : { figure: read, state: "done" };
}
