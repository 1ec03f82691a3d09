import type { ReactNode } from "react";
import { href, useLocation } from "react-router";
import { Button, ButtonLink } from "~/components/ui/button";
import { ProgressBar } from "~/components/ui/progress-bar";
import { Skeleton } from "~/components/ui/skeleton";
import { StatePanel } from "~/components/ui/state-panel";
import { useNewSift } from "~/hooks/use-sift";
import { useTimeLeft } from "~/hooks/use-time-left";
import { formatCount, formatPercent, formatSeconds, plural } from "~/lib/format";
import { searchOf, writeState } from "~/lib/url-state";
import type { SiftView } from "~/lib/views";
import { recipeLine, requestOf } from "~/lib/workbench/recipe-words";
import { useWorkbench } from "./workbench-context";

/**
 * What a section shows while it has no result: the question that comes first, the sift under way, or how to start one.
 * `null` means that there is a result to show.
 *
 * @param asked the sift that was just asked for from here; the one before is spoken of no more
 */
export function SectionState({
  start,
  asked = null,
  silent = false,
  onCancel,
}: {
  start?: ReactNode;
  asked?: { id: string | null; progress: number; pairs?: number } | null;
  silent?: boolean;
  onCancel?: () => void;
}) {
  const { ensemble, sift, result } = useWorkbench();
  const { search } = useLocation();
  if (result !== null) return null;
  const intake = { pathname: href("/ensembles/:id/intake", { id: ensemble.id }), search };
  if (asked !== null) {
    const { id, progress, pairs } = asked;
    return (
      <Running
        sift={{
          id,
          status: "running",
          progress,
          ...(pairs === undefined ? {} : { pairs }),
          ...(silent ? { silent } : {}),
        }}
        onCancel={onCancel}
      />
    );
  }
  if (sift !== null && (sift.status === "queued" || sift.status === "running"))
    return <Running sift={sift} />;
  if (ensemble.accepted === 0) {
    return (
      <StatePanel
        tone="held"
        title={ensemble.openQuestions > 0 ? "Intake comes first" : "No frame is accepted"}
        className="mt-6"
        actions={<ButtonLink to={intake}>Go to intake</ButtonLink>}
      >
        <p>
          {ensemble.openQuestions > 0
            ? `Nothing is computed before ${plural(ensemble.openQuestions, "question is", "questions are")} answered there.`
            : `All ${formatCount(ensemble.held)} frames are held; intake says why, frame by frame.`}
        </p>
      </StatePanel>
    );
  }
  if (sift?.status === "failed") {
    return (
      <StatePanel tone="danger" title="The sift failed" className="mt-6" actions={<Ways start={start} />}>
        <p>
          {sift.error ?? "It ended without a result."} The frames and their energies are as they were; ask
          again.
        </p>
        <p>{askedWith(sift)}</p>
      </StatePanel>
    );
  }
  return (
    <StatePanel
      title={sift?.status === "cancelled" ? "The sift was cancelled" : "Not sifted yet"}
      className="mt-6"
      actions={<Ways start={start} />}
    >
      <p>
        {plural(ensemble.accepted, "frame is", "frames are")} accepted. Which of them differ is found by
        comparing their shapes.
      </p>
      {sift?.status === "cancelled" ? <p>{askedWith(sift)}</p> : null}
    </StatePanel>
  );
}

/** "It was asked with MMFF94 energies, ..." */
function askedWith({ recipe }: SiftView): string {
  return `It was asked with ${recipeLine(recipe, null)}.`;
}

/** On from a section without a set: the sift, and the set before where this one came to nothing. */
function Ways({ start }: { start?: ReactNode }) {
  const { ensemble, state, lastSet } = useWorkbench();
  const { pathname, search } = useLocation();
  return (
    <>
      {start ?? (
        <ButtonLink to={{ pathname: href("/ensembles/:id/distinct-set", { id: ensemble.id }), search }}>
          Go to the distinct set
        </ButtonLink>
      )}
      {lastSet === null ? null : (
        <ButtonLink
          to={{
            pathname,
            search: searchOf(writeState({ ...state, sift: null }, new URLSearchParams(search))),
          }}
        >
          Back to the last set
        </ButtonLink>
      )}
    </>
  );
}

function Running({
  sift,
  onCancel,
}: {
  sift: Pick<SiftView, "status" | "progress" | "pairs" | "silent"> & { id: string | null };
  onCancel?: () => void;
}) {
  const { ensemble } = useWorkbench();
  const left = useTimeLeft(sift.status === "running" ? sift.id : null, sift.progress);
  return (
    <div className="mt-6 grid gap-6" aria-busy="true">
      <div className="max-w-read">
        <p role="status" className="mb-2 text-ink-2">
          {sift.status === "queued"
            ? `The sift of ${plural(ensemble.accepted, "frame")} waits for its turn.`
            : `Comparing ${plural(ensemble.accepted, "frame")}, ${formatPercent(sift.progress)} done${sift.pairs ? `, ${plural(sift.pairs, "pair")} so far` : ""}${left === null ? "" : `; ${formatSeconds(Math.max(1, Math.round(left)))} left`}.`}
        </p>
        <ProgressBar share={sift.progress} label="Sift" />
        {sift.silent ? (
          <p role="status" className="mt-2 text-held">
            The server does not answer at the moment. The sift is not lost: it is begun again where the server
            was interrupted, and this page goes on by itself.
          </p>
        ) : null}
        {onCancel === undefined ? null : (
          <Button size="sm" className="mt-3" onClick={onCancel}>
            Cancel
          </Button>
        )}
        <p className="mt-2 hidden text-xs text-ink-3 noscript:block">
          Load the page again to see how far it is.
        </p>
      </div>
      <Skeleton className="h-16 w-full" />
      <div className="grid gap-6 xl:grid-cols-2">
        <Skeleton className="h-72 w-full" />
        <Skeleton className="h-72 w-full max-xl:hidden" />
      </div>
    </div>
  );
}

/** What a section shows while its figures are of another moment than the sift: they are on their way. */
export function CatchingUp() {
  return (
    <div className="mt-6 grid gap-6" aria-busy="true">
      <p role="status" className="text-ink-2">
        The sift has just ended; its figures are being fetched.
        <span className="hidden noscript:inline"> Load the page again to see them.</span>
      </p>
      <Skeleton className="h-16 w-full" />
      <Skeleton className="h-72 w-full" />
    </div>
  );
}

/** Frames were held, released or read again since: the result shown is of the frames as they were. */
export function OutdatedNote({ onAgain, busy }: { onAgain?: () => void; busy?: boolean }) {
  const { sift, result, ensemble } = useWorkbench();
  if (sift === null || result === null || sift.current) return null;
  if (ensemble.mayCompute && onAgain === undefined) return <OutdatedWithAct sift={sift} />;
  return <OutdatedPanel onAgain={ensemble.mayCompute ? onAgain : undefined} busy={busy} />;
}

/** Where a section has no settings of a sift: the same recipe is asked for from the note itself. */
function OutdatedWithAct({ sift }: { sift: SiftView }) {
  const { ensemble, change } = useWorkbench();
  const { ask, asked, error } = useNewSift(ensemble.id, (id) => void change({ sift: id }));
  return (
    <OutdatedPanel
      onAgain={() => void ask(requestOf(sift.recipe))}
      busy={asked !== null}
      progress={asked?.progress}
      error={error}
    />
  );
}

function OutdatedPanel({
  onAgain,
  busy,
  progress,
  error,
}: {
  onAgain?: () => void;
  busy?: boolean;
  progress?: number;
  error?: string | null;
}) {
  return (
    <StatePanel
      tone="held"
      title="These results are of the frames as they were"
      className="mt-4"
      actions={
        onAgain ? (
          <Button onClick={onAgain} disabled={busy}>
            {progress === undefined ? "Sift the frames as they are" : `Comparing, ${formatPercent(progress)}`}
          </Button>
        ) : undefined
      }
    >
      <p>Frames were held, released or read again after this sift.</p>
      {error ? (
        <p role="alert" className="text-danger">
          {error}
        </p>
      ) : null}
    </StatePanel>
  );
}
