import { useEffect } from "react";
import { Link, useLocation, useRevalidator } from "react-router";
import type { HandOverAnswer } from "~/components/hand-over/answer";
import { CitationBlock } from "~/components/hand-over/citation-block";
import { CompareBlock } from "~/components/hand-over/compare-block";
import { DistinctFiles } from "~/components/hand-over/distinct-files";
import { EditionFilesBlock } from "~/components/hand-over/edition-files-block";
import { EditionsBlock } from "~/components/hand-over/editions-block";
import { LinksBlock } from "~/components/hand-over/links-block";
import { MethodsBlock } from "~/components/hand-over/methods-block";
import { RecipeBlock, SourcesBlock } from "~/components/hand-over/recipe-block";
import { VerifyStrip } from "~/components/hand-over/verify-strip";
import { Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { linkClass } from "~/components/ui/text-link";
import { useSameSift } from "~/hooks/use-same-sift";
import { handOverFinding } from "~/lib/edition/hand-over-finding";
import type { HandOverView } from "~/lib/edition/views";
import type { ExportFacts } from "~/services/sifts/describe-exports.server";
import { CatchingUp, OutdatedNote, SectionState } from "./section-state";
import { useWorkbench } from "./workbench-context";

/** Editions and links, then the distinct set as it is now: files, methods text, recipe, sources. */
export function HandOverSection({
  siftId,
  files,
  view,
  answer,
}: {
  /** The finished sift that files and methods are of. */
  siftId: string | null;
  files: readonly ExportFacts[] | null;
  view: HandOverView;
  answer?: HandOverAnswer;
}) {
  const { ensemble, sift, result } = useWorkbench();
  const { search } = useLocation();
  useWatch(view);
  const same = useSameSift(sift, siftId);
  const last = view.editions[0];
  if ((sift === null || result === null) && last === undefined) {
    return (
      <section aria-labelledby="section-title">
        <SectionHead id="section-title" title="Hand-over" />
        <SectionState />
      </section>
    );
  }
  const finding = handOverFinding(view, result?.kept.length ?? null);
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Hand-over"
        aside={
          last ? (
            <Link
              className={linkClass}
              to={{ pathname: `/ensembles/${ensemble.id}/editions/${last.number}`, search }}
            >
              See what a guest sees
            </Link>
          ) : null
        }
      />
      <Finding more={finding.second}>{finding.text}</Finding>
      <OutdatedNote />
      {answer?.message !== undefined ? (
        <Note tone="danger" className="mt-4">
          <p role="alert">{answer.message}</p>
        </Note>
      ) : null}
      {last ? <VerifyStrip edition={last} mayShare={view.mayShare} /> : null}
      {ensemble.role === "guest" ? null : <EditionsBlock ensembleId={ensemble.id} view={view} />}
      {view.comparison ? <CompareBlock comparison={view.comparison} /> : null}
      {view.comparisonFault === null ? null : (
        <Note tone="danger" className="mt-4">
          <p role="alert">{view.comparisonFault}</p>
        </Note>
      )}
      {ensemble.role === "guest" ? null : <LinksBlock view={view} />}
      {last ? (
        <div className="mt-8 grid gap-x-8 xl:grid-cols-2">
          <EditionFilesBlock ensembleId={ensemble.id} edition={last} />
          <CitationBlock
            input={{
              team: ensemble.team.name,
              ensemble: ensemble.name,
              number: last.number,
              title: last.title,
              frozenAt: last.frozenAt,
              contentSha256: last.contentSha256,
              version: last.version,
            }}
          />
        </div>
      ) : null}
      {same ? null : <CatchingUp />}
      {same && sift !== null && result !== null ? (
        <>
          <DistinctFiles files={files} />
          {view.methods ? <MethodsBlock lines={view.methods} /> : null}
          <RecipeBlock recipe={sift.recipe} />
        </>
      ) : null}
      <SourcesBlock />
    </section>
  );
}

const LOOK_MS = 1_500;

/** Looks again while an edition is being recomputed. */
function useWatch({ editions }: HandOverView) {
  const { revalidate, state } = useRevalidator();
  const busy = editions.some(
    ({ verifying }) => verifying?.state === "queued" || verifying?.state === "running",
  );
  useEffect(() => {
    if (!busy || state !== "idle") return;
    const timer = setTimeout(() => void revalidate(), LOOK_MS);
    return () => clearTimeout(timer);
  }, [busy, state, revalidate]);
}
