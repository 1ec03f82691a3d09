import { type ReactNode, useMemo } from "react";
import { Button } from "~/components/ui/button";
import { TextButton } from "~/components/ui/text-link";
import { plateauKey, recipeKey, useWholeEnsemble, type WholeEnsemble } from "~/hooks/use-whole-ensemble";
import type { CountAnswer } from "~/hooks/whole-ensemble-protocol";
import { DomainError } from "~/lib/errors";
import { fixed, formatBytes, formatSeconds, plural, withUnit } from "~/lib/format";
import type { SiftRecipe, SiftRequest } from "~/lib/recipe/recipe";
import { resolveRecipe } from "~/lib/recipe/resolve";
import type { EnsembleView } from "~/lib/views";
import { joinWords } from "~/lib/workbench/findings";
import { nearnessHistogram } from "~/lib/workbench/nearness";
import { countedTolerances, plateauSentence } from "~/lib/workbench/plateau";
import { NearestPairs, NearestToSelected } from "./near-cut";
import { NearnessChart } from "./nearness-chart";
import { PairDistances } from "./pair-distances";
import { PlateauChart, PlateauPlace } from "./plateau-chart";
import { useWorkbench } from "./workbench-context";

/** What a request means; null where the ensemble does not allow it, which the server says in words. */
function recipeOf(request: SiftRequest, ensemble: EnsembleView): SiftRecipe | null {
  try {
    return resolveRecipe(request, { levels: ensemble.levels, chirality: ensemble.chirality });
  } catch (error) {
    if (error instanceof DomainError) return null;
    throw error;
  }
}

/**
 * Where the tolerance stands: the count against it, how near the frames lie, and the pairs that it just merges or just
 * keeps apart. While a slider moves the count is worked out here, before the server has been asked.
 *
 * @param draft the settings as they stand; null: those of the sift shown
 */
export function ToleranceBlock({
  draft,
  stale,
  failed,
  onBack,
  onTake,
}: {
  draft: SiftRequest | null;
  /** The set is about to be another one: what stands here of it is greyed. */
  stale: boolean;
  /** The set with these settings could not be made. */
  failed: boolean;
  /** Where the set does not follow the settings: back to those of the set that is shown. */
  onBack: (() => void) | null;
  onTake: ((tolerance: number) => void) | null;
}) {
  const { ensemble, sift, result } = useWorkbench();
  const live = useMemo(
    () => (draft === null ? (sift?.recipe ?? null) : recipeOf(draft, ensemble)),
    [draft, ensemble, sift?.recipe],
  );
  const shown = useMemo(
    () =>
      sift !== null && result !== null
        ? {
            id: sift.id,
            recipe: sift.recipe,
            kept: result.kept.map(({ frame }) => frame),
            current: sift.current,
          }
        : null,
    [sift, result],
  );
  const whole = useWholeEnsemble(ensemble, shown, live);
  const nearness = whole.nearness?.key === sift?.id ? whole.nearness : null;
  const histogram = useMemo(
    () =>
      result !== null && sift !== null && nearness !== null
        ? nearnessHistogram(result, nearness.rmsd, sift.recipe.rmsdTolerance)
        : null,
    [result, sift, nearness],
  );
  if (sift === null || result === null || live === null) return null;
  const isShown = recipeKey(live) === recipeKey(sift.recipe);
  // The newest count: of the settings as they stand, or of those of a moment ago while the thumb moves.
  const counted = whole.count !== null && sameButTolerances(whole.count.recipe, live) ? whole.count : null;
  const here = isShown
    ? { tolerance: live.rmsdTolerance, count: result.kept.length }
    : counted !== null
      ? { tolerance: counted.recipe.rmsdTolerance, count: counted.kept }
      : null;
  return (
    <>
      <LiveLine
        counted={counted}
        live={live}
        isShown={isShown}
        whole={whole}
        failed={failed}
        onBack={onBack}
      />
      <p className="mt-4 hidden text-xs text-ink-3 noscript:block">
        How the count hangs on the tolerance is counted in the browser and needs script.
      </p>
      <div className="mt-6 grid gap-x-10 gap-y-9 noscript:hidden xl:grid-cols-2">
        {sift.current && whole.plateau !== null ? (
          <PlateauChart
            counts={whole.plateau.counts}
            here={here}
            energyTolerance={live.level === null ? null : live.energyTolerance}
            stale={whole.plateau.key !== plateauKey(live)}
            note={plateauNote(whole, here, live)}
            {...(onTake ? { onTake } : {})}
          />
        ) : (
          <PlateauPlace>
            <Waiting whole={whole} current={sift.current} />
          </PlateauPlace>
        )}
        <OfTheSet stale={stale}>
          {histogram !== null ? <NearnessChart histogram={histogram} tolerance={live.rmsdTolerance} /> : null}
        </OfTheSet>
        <OfTheSet stale={stale}>
          <NearestPairs nearness={nearness} progress={whole.progress} />
        </OfTheSet>
        <OfTheSet stale={stale}>
          <NearestToSelected />
        </OfTheSet>
      </div>
      <OfTheSet stale={stale}>
        <PairDistances />
      </OfTheSet>
    </>
  );
}

/** What belongs to the set shown, and is left behind while the settings move. */
function OfTheSet({ stale, children }: { stale: boolean; children: ReactNode }) {
  return (
    <div className={`min-w-0 transition-opacity ${stale ? "opacity-50" : ""}`} aria-busy={stale}>
      {children}
    </div>
  );
}

function plateauNote(
  whole: WholeEnsemble,
  here: { tolerance: number; count: number } | null,
  live: SiftRecipe,
): string | undefined {
  if (whole.plateau === null) return undefined;
  const points = countedTolerances(whole.plateau.counts, here);
  const sentence = here ? plateauSentence(points, here.tolerance) : null;
  const sifts = whole.plateau.counts.rmsdTolerances.length * whole.plateau.counts.energyFactors.length;
  const counted = `${plural(sifts, "sift")} of all frames, in ${formatSeconds(Math.max(0.01, whole.plateau.seconds))} in this browser.`;
  const bound = whole.plateau.counts.exact
    ? ""
    : " Where a comparison met its work bound a count may be too large.";
  const lines =
    live.level !== null && live.energyTolerance !== null
      ? " Dotted and dashed: half and double the energy tolerance."
      : "";
  return `${sentence ?? ""}${lines} ${counted}${bound}`.trim();
}

/** True where two recipes differ in the tolerances and the window alone, which sliders move. */
function sameButTolerances(a: SiftRecipe, b: SiftRecipe): boolean {
  const fixedPart = (recipe: SiftRecipe) =>
    recipeKey({ ...recipe, rmsdTolerance: 0, energyTolerance: null, window: null });
  return fixedPart(a) === fixedPart(b);
}

/** "0.120 Å", with what else a slider moved since. */
function countedAt(counted: SiftRecipe, live: SiftRecipe): string {
  const parts = [withUnit(fixed(counted.rmsdTolerance, 3), "Å")];
  if (counted.energyTolerance !== live.energyTolerance)
    parts.push(
      counted.energyTolerance === null
        ? "no energy tolerance"
        : withUnit(fixed(counted.energyTolerance, 3), "kcal/mol"),
    );
  if (counted.window !== live.window)
    parts.push(
      counted.window === null ? "no window" : `a window of ${withUnit(fixed(counted.window, 1), "kcal/mol")}`,
    );
  return joinWords(parts);
}

/** The count as the slider stands, in words, before the set that is shown has followed. */
function LiveLine({
  counted,
  live,
  isShown,
  whole,
  failed,
  onBack,
}: {
  /** Newest count, perhaps of the settings of a moment ago; null: none yet. */
  counted: CountAnswer | null;
  live: SiftRecipe;
  isShown: boolean;
  whole: WholeEnsemble;
  failed: boolean;
  onBack: (() => void) | null;
}) {
  const after = onBack === null && !failed ? "; the set below follows." : "; the set below stays as it is. ";
  return (
    <p className="figures mt-1 min-h-5 text-ink-2" aria-live="polite">
      {isShown || whole.state !== "ready"
        ? null
        : counted === null
          ? "Counting with the new settings."
          : counted.key === recipeKey(live)
            ? `${plural(counted.kept, "shape")} at ${withUnit(fixed(live.rmsdTolerance, 3), "Å")}, counted in ${formatSeconds(Math.max(0.01, counted.seconds))}${after}`
            : `${plural(counted.kept, "shape")} at ${countedAt(counted.recipe, live)}; counting on.`}{" "}
      {isShown || onBack === null ? null : <TextButton onClick={onBack}>Back to its settings</TextButton>}
    </p>
  );
}

function Waiting({ whole, current }: { whole: WholeEnsemble; current: boolean }) {
  if (!current) return <p>Sift the frames as they are to see this.</p>;
  if (whole.state === "failed") return <p className="text-danger">{whole.error}</p>;
  if (whole.state === "waiting")
    return (
      <>
        <p>This takes the coordinates of all accepted frames, {formatBytes(whole.bytes)}, to this browser.</p>
        <Button size="sm" onClick={whole.load}>
          Fetch and count
        </Button>
      </>
    );
  return (
    <p role="status" className="appear-late">
      {whole.state === "loading"
        ? `Fetching ${formatBytes(whole.bytes)} of coordinates.`
        : `Counting at 12 tolerances from ${withUnit("0.02 to 1.00", "Å")}.`}
    </p>
  );
}
