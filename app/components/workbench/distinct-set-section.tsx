import { Download } from "lucide-react";
import { useMemo, useRef, useState } from "react";
import { href, useActionData, useLocation, useRevalidator } from "react-router";
import { Button, buttonClass } from "~/components/ui/button";
import { Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { ProgressBar } from "~/components/ui/progress-bar";
import { TextButton, TextLink } from "~/components/ui/text-link";
import { makeCurrent, useNewSift } from "~/hooks/use-sift";
import { useTimeLeft } from "~/hooks/use-time-left";
import { capital, fixed, formatRmsd, formatSeconds, plural, withUnit } from "~/lib/format";
import { type SiftRecipe, type SiftRequest, WIDE_RMSD_TOLERANCE } from "~/lib/recipe/recipe";
import { distinctFinding, joinWords, nearMirror } from "~/lib/workbench/findings";
import { defaultsOf, recipeLine, requestOf, settingsApart } from "~/lib/workbench/recipe-words";
import type { ActAnswer } from "./act-answer";
import { DistinctTable } from "./distinct-table";
import { FindFrame } from "./find-frame";
import { PlainSiftForm } from "./plain-forms";
import { OutdatedNote, SectionState } from "./section-state";
import { SiftSettings } from "./sift-settings";
import { ToleranceBlock } from "./tolerance-block";
import { useFoundBy } from "./use-found-by";
import { useWorkbench } from "./workbench-context";

/**
 * Of larger ensembles a moving thumb asks only the browser, which counts; the server is asked for the set once it rests.
 * Each set has to be computed, stored and sent, and nobody looks at those passed on the way.
 */
const MOST_ASKED_ON_THE_WAY = 2000;

/** Reducing the accepted frames to the shapes that differ, by a recipe that can be moved. */
export function DistinctSetSection() {
  const { ensemble, sift, result, state, change } = useWorkbench();
  const { search } = useLocation();
  const { revalidate } = useRevalidator();
  const foundBy = useFoundBy();
  // One step of history for one gesture: while a thumb is held the later results replace the first.
  const gesture = useRef<"open" | "fresh">("fresh");
  const [before, setBefore] = useState<{
    id: string;
    kept: number;
    recipe: SiftRecipe;
  } | null>(null);
  // Settings that were cancelled go back to those of the set that is shown.
  const [cancelled, setCancelled] = useState(0);
  // The settings as they stand, ahead of the set that is shown.
  const [draft, setDraft] = useState<SiftRequest | null>(null);
  // A first set that is asked for, before the server has answered, and one that is ready, before it has come.
  const [onTheWay, setOnTheWay] = useState<{ progress: number } | null>(null);
  const moved = useRef<SiftRequest | null>(null);
  const lastAsked = useRef<SiftRequest | null>(null);
  moved.current = draft;
  const latest = useRef(change);
  latest.current = change;
  const named = useRef<Promise<void> | null>(null);
  const { ask, cancel, asked, silent, error, clearError } = useNewSift(ensemble.id, async (id) => {
    // The thumb has moved on meanwhile: the answer to where it stands now is on its way.
    if (moved.current !== null && moved.current !== lastAsked.current) return;
    if (sift === null || id === sift.id) {
      setDraft(null);
      // Asked for again it is the sift of before, which now has a set: the address stays, what it shows does not.
      if (result === null) {
        setOnTheWay({ progress: 1 });
        await revalidate();
        setOnTheWay(null);
      }
      return;
    }
    if (result && gesture.current === "fresh")
      setBefore({
        id: sift.id,
        kept: result.kept.length,
        recipe: sift.recipe,
      });
    const replace = gesture.current === "open";
    gesture.current = "open";
    // The step before must be in the history, or this one would overtake it.
    await named.current;
    if (result === null) setOnTheWay({ progress: 1 });
    await latest.current({ sift: id }, { replace });
    setOnTheWay(null);
  });
  // biome-ignore lint/correctness/useExhaustiveDependencies: a sift never changes its recipe; read again it is the same one
  const request = useMemo<SiftRequest>(
    () => (sift ? requestOf(sift.recipe) : { level: ensemble.levels[0]?.id ?? null }),
    [sift?.id, ensemble.levels[0]?.id],
  );
  const onAsk = (next: SiftRequest, settled: boolean) => {
    clearError();
    lastAsked.current = next;
    // An address without a sift means the newest one, which the answer will be: name what is shown, so that "back" finds it.
    if (sift !== null && result !== null && state.sift === null) {
      named.current = change({ sift: sift.id }, { replace: true });
    }
    if (result === null) setOnTheWay({ progress: 0 });
    void ask(next).finally(() => {
      setOnTheWay((now) => (now?.progress === 0 ? null : now));
      if (settled) gesture.current = "fresh";
    });
  };
  // Who may not compute moves the tolerances for the count alone: the set that is shown stays.
  const follows = ensemble.mayCompute && draft !== null;
  const fade = `transition-opacity ${follows ? "opacity-50" : ""}`;
  const answer = useActionData<ActAnswer>();
  const back = () => {
    setCancelled(cancelled + 1);
    setDraft(null);
  };
  const finding = result ? distinctFinding(result) : null;
  const startButton = ensemble.mayCompute ? (
    <Button kind="primary" onClick={() => onAsk(request, true)}>
      Sift {plural(ensemble.accepted, "frame")}
    </Button>
  ) : undefined;
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Distinct set"
        aside={
          <span className="flex flex-wrap gap-x-4 gap-y-1">
            {result !== null ? (
              <TextLink to={`${href("/ensembles/:id/compare", { id: ensemble.id })}${search}`}>
                Against an outside structure
              </TextLink>
            ) : null}
            <TextLink to={`${href("/methods")}#distinct-set`}>How this is computed</TextLink>
          </span>
        }
      />
      {sift === null || result === null || finding === null ? (
        <>
          <SectionState
            start={startButton}
            asked={asked ?? (onTheWay && { id: null, ...onTheWay })}
            silent={silent}
            onCancel={() => {
              cancel();
              setOnTheWay(null);
            }}
          />
          {error === null ? null : (
            <p role="alert" className="mt-3 text-danger">
              {error}
            </p>
          )}
        </>
      ) : (
        <>
          <div className={fade} aria-busy={follows}>
            <Finding more={[finding.second, foundBy?.sentence].filter(Boolean).join(" ") || undefined}>
              {finding.text}
            </Finding>
          </div>
          {before !== null && before.id !== sift.id ? (
            <p className="mt-1 text-ink-2">
              Before: {plural(before.kept, "shape")}, {beforeWords(before.recipe, sift.recipe)}.{" "}
              <TextButton
                onClick={() => {
                  setBefore(null);
                  makeCurrent(ensemble.id, requestOf(before.recipe));
                  change({ sift: before.id });
                }}
              >
                Undo
              </TextButton>
            </p>
          ) : null}
          <OutdatedNote onAgain={() => onAsk(request, true)} busy={asked !== null} />
          <NotDefault
            onBack={ensemble.mayCompute ? () => onAsk(requestOf(defaultsOf(sift.recipe)), true) : null}
          />
          <SiftSettings
            key={cancelled}
            ensemble={ensemble}
            request={request}
            words={`${sift.recipe.levelName === null ? capital(recipeLine(sift.recipe, null)) : recipeLine(sift.recipe, null)}.`}
            onDraft={setDraft}
            onAsk={(next, settled) => {
              if (!ensemble.mayCompute) return;
              if (settled || ensemble.accepted <= MOST_ASKED_ON_THE_WAY) onAsk(next, settled);
            }}
          />
          <SiftLine
            asked={asked}
            silent={silent}
            error={error}
            onCancel={() => {
              cancel();
              back();
            }}
            onAgain={() => onAsk(draft ?? lastAsked.current ?? request, true)}
            onBack={
              draft === null
                ? null
                : () => {
                    clearError();
                    back();
                  }
            }
          />
          {ensemble.mayCompute ? <PlainSiftForm ensemble={ensemble} request={request} /> : null}
          {answer && answer.message !== undefined ? (
            <p role="alert" className="mt-2 text-danger">
              {answer.message}
            </p>
          ) : null}
          {ensemble.mayCompute ? null : (
            <p className="mt-3 text-xs text-ink-3 noscript:hidden print:hidden">
              {ensemble.role === "guest"
                ? "This is an example: move the tolerances to see what they would keep. It is counted in this browser, and nothing is stored; in a team of your own the set follows and all settings can be moved."
                : "You read this team’s work: move the tolerances to see what they would keep. It is counted in this browser, and nothing is stored; an analyst or an owner can make that the set."}
            </p>
          )}
          <div className={fade} aria-busy={follows}>
            <WideTolerance />
            <MirrorWarning />
          </div>
          <ToleranceBlock
            draft={draft}
            stale={follows}
            failed={error !== null}
            onBack={ensemble.mayCompute ? null : back}
            onTake={
              ensemble.mayCompute
                ? (rmsdTolerance) => {
                    const next = { ...(draft ?? request), rmsdTolerance };
                    setDraft(next);
                    onAsk(next, true);
                  }
                : null
            }
          />
          <div className={fade} aria-busy={follows}>
            <FindFrame />
            <DistinctTable
              foundBy={foundBy}
              tools={
                <a
                  className={buttonClass({ size: "sm" })}
                  href={href("/files/sifts/:id/export.xyz", { id: sift.id })}
                  download
                >
                  <Download aria-hidden="true" />
                  XYZ
                </a>
              }
            />
          </div>
        </>
      )}
    </section>
  );
}

/** What the set before was made with, as far as it differs from the one that is shown. */
function beforeWords(before: SiftRecipe, now: SiftRecipe): string {
  const apart = settingsApart(before, now).map(({ is }) => is);
  // Frames held, released or read again since: the same settings on other data.
  return apart.length > 0 ? joinWords(apart) : "with the same settings on other data";
}

/** The last settings asked for are the ensemble's own, for everybody: where they are not the usual ones it is said. */
function NotDefault({ onBack }: { onBack: (() => void) | null }) {
  const { sift, ensemble } = useWorkbench();
  if (sift === null) return null;
  const apart = settingsApart(sift.recipe, defaultsOf(sift.recipe));
  if (apart.length === 0) return null;
  const back = joinWords(apart.map(({ was }) => was));
  return (
    <p className="mt-1 text-ink-2">
      Not the default settings: {joinWords(apart.map(({ is }) => is))}.{" "}
      {ensemble.role === "guest" ? "" : "Those asked for last hold for everybody who opens this ensemble. "}
      {onBack === null ? `The default: ${back}.` : null}
      {onBack === null ? null : <TextButton onClick={onBack}>Back to the defaults: {back}</TextButton>}
    </p>
  );
}

/** A tolerance that merges what nobody would call one shape is taken, and said. */
function WideTolerance() {
  const { sift } = useWorkbench();
  if (sift === null || sift.recipe.rmsdTolerance <= WIDE_RMSD_TOLERANCE) return null;
  return (
    <Note tone="remark" className="mt-4">
      An RMSD tolerance of {withUnit(fixed(sift.recipe.rmsdTolerance, 3), "Å")} is wide: above{" "}
      {withUnit(String(WIDE_RMSD_TOLERANCE), "Å")} different shapes merge into one (common practice, no
      source). Populations and what is found complete then say little.
    </Note>
  );
}

/** The sift under way, while the one before stays on the page. The line keeps its height, so that nothing jumps. */
function SiftLine({
  asked,
  silent,
  error,
  onCancel,
  onAgain,
  onBack,
}: {
  asked: ReturnType<typeof useNewSift>["asked"];
  silent: boolean;
  error: string | null;
  onCancel: () => void;
  onAgain: () => void;
  /** To the settings of the set that is shown; null where they are the same. */
  onBack: (() => void) | null;
}) {
  const left = useTimeLeft(asked?.id ?? null, asked?.progress ?? 0);
  return (
    <div className="mt-2 min-h-6" aria-live="polite">
      {error ? (
        <div className="flex flex-wrap items-baseline gap-x-4">
          <p role="alert" className="text-danger">
            {error}
          </p>
          <TextButton onClick={onAgain}>Ask again</TextButton>
          {onBack === null ? null : (
            <TextButton onClick={onBack}>Back to the settings of the set below</TextButton>
          )}
        </div>
      ) : silent ? (
        <p className="flex flex-wrap gap-x-4 text-ink-2">
          The server does not answer. The new settings stand and are asked for again until it does.
          <TextButton onClick={onCancel}>Cancel</TextButton>
        </p>
      ) : asked ? (
        <div className="appear-late flex max-w-read items-center gap-4 text-xs text-ink-2">
          <span className="figures whitespace-nowrap">
            Comparing with the new settings
            {asked.pairs ? `, ${plural(asked.pairs, "pair")} so far` : ""}
            {left === null ? "" : `; ${formatSeconds(Math.max(1, Math.round(left)))} left`}
          </span>
          <span className="flex-1">
            <ProgressBar share={asked.progress} label="Sift with the new settings" />
          </span>
          <TextButton onClick={onCancel}>Cancel</TextButton>
        </div>
      ) : null}
    </div>
  );
}

/** Conformers whose factor of 2 hangs on the tolerance. */
function MirrorWarning() {
  const { sift, result } = useWorkbench();
  if (sift === null || result === null) return null;
  const near = nearMirror(result, sift.recipe);
  if (near.length === 0) return null;
  const named = near.slice(0, 5).map(({ name, rmsd }) => `${name} (${withUnit(formatRmsd(rmsd), "Å")})`);
  const rest = near.length - named.length;
  return (
    <Note tone="remark" className="mt-4">
      {joinWords(rest > 0 ? [...named, `${rest} more`] : named)}{" "}
      {near.length === 1 ? "lies near its own mirror image" : "lie near their own mirror images"}, not far
      from the tolerance of {withUnit(fixed(sift.recipe.rmsdTolerance, 3), "Å")}. Whether{" "}
      {near.length === 1 ? "it counts" : "they count"} once or twice hangs on that choice.
    </Note>
  );
}
