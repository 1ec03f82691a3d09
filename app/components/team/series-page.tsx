import { useRef, useState } from "react";
import { href, Link, useNavigate, useRevalidator } from "react-router";
import { pageClass } from "~/components/layout/app-shell";
import { ButtonLink } from "~/components/ui/button";
import { DepthKey } from "~/components/ui/depth-key";
import { DropOverlay, Dropzone, FileButton, usePageDrop } from "~/components/ui/dropzone";
import { Finding } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { linkClass, TextLink } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import type { Taken } from "~/components/ui/upload-list";
import { UploadList } from "~/components/ui/upload-row";
import { useUploads } from "~/components/ui/use-uploads";
import { isFiltered, type SeriesState, shownWords, writeSeriesState } from "~/lib/series-state";
import type { EnsembleRow, Role } from "~/lib/views";
import { AskSeveral } from "./ask-several";
import { EnsembleActs } from "./ensemble-acts";
import { EnsembleTable } from "./ensemble-table";
import { LeaveGuard } from "./leave-guard";
import { NewSeries } from "./new-series";
import { SeriesFilters } from "./series-filters";
import { TeamTabs } from "./team-tabs";
import { useDeletion } from "./use-deletion";

/** What the loader of the series page hands over. */
export interface SeriesPageData {
  team: { id: string; name: string };
  role: Role;
  mayCompute: boolean;
  series: readonly { id: string; name: string; ensembles: number }[];
  chosen: { id: string; name: string } | null;
  finding: string;
  /** Ensembles of the team or the chosen series; those that filters leave; those of this page. */
  total: number;
  shown: number;
  rows: EnsembleRow[];
  pages: number;
  levels: readonly string[];
  legend: EnsembleRow["levels"];
  state: SeriesState;
  now: string;
  example: string | null;
  /** "512 MB each". */
  limits: string;
}

/** A team's ensembles: finding, search, filters, table; files dropped anywhere start an intake. */
export function SeriesPage({ data }: { data: SeriesPageData }) {
  const { team, chosen, state, mayCompute } = data;
  const { uploads, several, setSeveral, take, send, mayLeave } = useIntake(data);
  const remove = useDeletion(team.id);
  const over = usePageDrop(take, !mayCompute || several !== null);
  const where = `into ${chosen ? chosen.name : "the series Unsorted"}, as ${over === 1 ? "an ensemble" : "ensembles"}`;
  return (
    <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
      <div className="flex items-end justify-between gap-x-6 gap-y-3 max-sm:flex-wrap">
        <div className="min-w-0">
          <h1 className="text-lg font-semibold tracking-title break-words sm:text-xl">
            {chosen?.name ?? team.name}
          </h1>
          <Finding
            wide
            more={
              data.levels.length < 2 ? undefined : (
                <TextLink
                  to={{
                    pathname: href("/teams/:team/windows", { team: team.id }),
                    search: chosen ? `?series=${chosen.id}` : "",
                  }}
                >
                  How wide a window {chosen ? "this series needs" : "these molecules need"}
                </TextLink>
              )
            }
          >
            {data.finding}
          </Finding>
        </div>
        {mayCompute ? (
          <div className="flex shrink-0 gap-2 max-sm:w-full max-sm:[&>*]:flex-1">
            <NewSeries team={team.id} />
            <FileButton onFiles={take}>Add files</FileButton>
          </div>
        ) : null}
      </div>
      <TeamTabs team={team.id} series={data.series} chosen={chosen?.id ?? null} />
      <div className="mt-6 empty:hidden">
        <UploadList
          uploads={uploads.list}
          onCancel={uploads.cancel}
          onAgain={uploads.again}
          onDismiss={uploads.dismiss}
        />
      </div>
      {data.total === 0 ? (
        <NoEnsembles data={data} onFiles={take} />
      ) : (
        <Ensembles data={data} onDelete={data.role === "owner" ? remove : null} />
      )}
      <div className="mt-6 flex flex-wrap items-end justify-between gap-6">
        {data.total > 0 ? <DepthKey className="w-full max-w-105" /> : null}
        {mayCompute && data.total > 0 ? (
          <p className="text-xs text-ink-3 noscript:hidden print:hidden">
            Drop files anywhere on this page to start an intake.
          </p>
        ) : null}
      </div>
      <LeaveGuard underWay={uploads.underWay} mayLeave={mayLeave} />
      <DropOverlay over={over} where={where} />
      <AskSeveral files={several} onAnswer={send} onCancel={() => setSeveral(null)} key={state.series} />
    </div>
  );
}

/** Files from drop, dialog or paste: one goes to its intake page, several are asked about and stay in the list. */
function useIntake(data: SeriesPageData) {
  const { team, chosen } = data;
  const [several, setSeveral] = useState<File[] | null>(null);
  const [alone, setAlone] = useState(false);
  const navigate = useNavigate();
  const revalidator = useRevalidator();
  // The page moves on by itself before the list has noted that its one upload is over.
  const moving = useRef(false);
  const onTaken = (taken: Taken) => {
    moving.current = alone;
    if (alone && taken.already) {
      showToast({
        tone: "done",
        badge: "already here",
        text: `Already here as ${taken.name}: the same bytes make no second ensemble.`,
      });
    }
    if (alone) navigate(href("/ensembles/:id/intake", { id: taken.id }));
    else revalidator.revalidate();
  };
  const uploads = useUploads(onTaken);

  const add = (files: File[]) =>
    uploads.add({
      action: href("/files/upload"),
      fields: { team: team.id, ...(chosen ? { series: chosen.name } : {}) },
      files,
    });
  const take = (files: File[]) => {
    if (files.length > 1) return setSeveral(files);
    // A second file while the first is under way keeps the person on this page, with both in the list.
    setAlone(!uploads.underWay);
    add(files);
  };
  const send = (together: boolean) => {
    const files = several ?? [];
    setSeveral(null);
    setAlone(together && !uploads.underWay);
    if (together) add(files);
    else for (const file of files) add([file]);
  };
  return { uploads, several, setSeveral, take, send, mayLeave: () => moving.current };
}

function Ensembles({
  data,
  onDelete,
}: {
  data: SeriesPageData;
  onDelete: ((row: EnsembleRow) => void) | null;
}) {
  const { state } = data;
  const to = (page: number) => `?${writeSeriesState({ ...state, page })}`;
  const plain = `?${writeSeriesState({ ...state, q: "", level: null, state: null, held: null, page: 1 })}`;
  return (
    <>
      <div className="mt-6">
        <SeriesFilters state={state} levels={data.levels} legend={data.legend} />
      </div>
      <div className="mt-3">
        {data.rows.length > 0 ? (
          <EnsembleTable
            rows={data.rows}
            state={state}
            now={data.now}
            showSeries={data.chosen === null && data.series.length > 1}
            acts={
              data.mayCompute
                ? (row) => (
                    <EnsembleActs row={row} team={data.team.id} series={data.series} onDelete={onDelete} />
                  )
                : null
            }
          />
        ) : (
          <StatePanel
            level="h2"
            title="Nothing fits"
            className="mt-6"
            actions={<TextLink to={plain}>Show all</TextLink>}
          >
            No ensemble here has what the search and the filters ask for.
          </StatePanel>
        )}
      </div>
      <p role="status" className="mt-3 flex flex-wrap gap-4 text-xs text-ink-3">
        {isFiltered(state) ? (
          <span>
            {shownWords(data.shown, data.total)} ·{" "}
            <Link className={linkClass} to={plain}>
              show all
            </Link>
          </span>
        ) : null}
        {data.pages > 1 ? (
          <span className="flex gap-3">
            Page {state.page} of {data.pages}
            {state.page > 1 ? <TextLink to={to(state.page - 1)}>the one before</TextLink> : null}
            {state.page < data.pages ? <TextLink to={to(state.page + 1)}>the next</TextLink> : null}
          </span>
        ) : null}
      </p>
    </>
  );
}

function NoEnsembles({ data, onFiles }: { data: SeriesPageData; onFiles: (files: File[]) => void }) {
  const example = data.example ? (
    <ButtonLink to={href("/ensembles/:id", { id: data.example })}>Look at a finished one</ButtonLink>
  ) : null;
  if (!data.mayCompute) {
    return (
      <StatePanel level="h2" title="No ensembles yet" className="mt-8" actions={example}>
        An analyst or owner of the team takes files in; you will see them here.
      </StatePanel>
    );
  }
  return (
    <div className="mt-8 grid gap-8 lg:grid-cols-2">
      <StatePanel
        level="h2"
        title="No ensembles yet"
        actions={
          <>
            <FileButton kind="plain" onFiles={onFiles}>
              Add your own files
            </FileButton>
            {example}
          </>
        }
      >
        <span className="noscript:hidden">Drop files anywhere on this page, or choose them.</span>
        <span className="hidden noscript:inline">
          Adding files needs script in the browser, or{" "}
          <a className={linkClass} href={href("/api")}>
            the API
          </a>
          .
        </span>
        {example
          ? " The finished one shows what becomes of them. Its temperature, window and tolerances can be moved there; nothing is kept."
          : ""}
      </StatePanel>
      <Dropzone
        onFiles={onFiles}
        hint={`XYZ or SDF, plain, gzip or in a zip archive; up to ${data.limits}`}
      />
    </div>
  );
}
