import { data } from "react-router";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import type { ActAnswer } from "~/components/team/ensemble-acts";
import { SeriesPage, type SeriesPageData } from "~/components/team/series-page";
import { actorContext, requestIdContext } from "~/context";
import { env } from "~/env.server";
import { formatBytes } from "~/lib/format";
import {
  chooseRows,
  levelLegend,
  levelNames,
  ROWS_A_PAGE,
  readSeriesState,
  seriesFinding,
} from "~/lib/series-state";
import { readForm } from "~/routes/read-form.server";
import type { Actor } from "~/services/auth/access.server";
import { createSeries, seriesNameSchema } from "~/services/ensembles/create-series.server";
import { deleteEnsemble } from "~/services/ensembles/delete-ensemble.server";
import { listEnsembles } from "~/services/ensembles/list-ensembles.server";
import { listSeries } from "~/services/ensembles/list-series.server";
import { loadExample } from "~/services/ensembles/load-example.server";
import {
  ensembleNameSchema,
  moveEnsemble,
  renameEnsemble,
} from "~/services/ensembles/rename-ensemble.server";
import { restoreEnsemble } from "~/services/ensembles/restore-ensemble.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import { loadTeam } from "~/services/teams/load-team.server";
import type { Route } from "./+types/series";

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData?.chosen?.name ?? loaderData?.team.name ?? "Series"} · Lowlying` }];
}

export const handle: ShellHandle<SeriesPageData> = {
  crumbs: ({ chosen }) => (chosen ? [{ label: chosen.name }] : []),
};

export async function loader({ params, context, url }: Route.LoaderArgs): Promise<SeriesPageData> {
  const actor = context.get(actorContext);
  const state = readSeriesState(url.searchParams);
  return forPage(context.get(requestIdContext), async () => {
    const teamId = params.team;
    const [team, series, all] = await Promise.all([
      loadTeam(actor, teamId),
      listSeries({ actor, teamId }),
      listEnsembles({ actor, teamId, series: state.series ?? undefined }),
    ]);
    const chosen = series.find(({ id }) => id === state.series) ?? null;
    if (state.series !== null && chosen === null) throw notFound();
    const fitting = chooseRows(all, state);
    const pages = Math.max(1, Math.ceil(fitting.length / ROWS_A_PAGE));
    const page = Math.min(state.page, pages);
    return {
      team: { id: team.id, name: team.name },
      role: team.role,
      mayCompute: team.mayCompute,
      series: series.map(({ id, name, ensembles }) => ({ id, name, ensembles })),
      chosen: chosen && { id: chosen.id, name: chosen.name },
      finding: seriesFinding(all),
      total: all.length,
      shown: fitting.length,
      rows: fitting.slice((page - 1) * ROWS_A_PAGE, page * ROWS_A_PAGE),
      pages,
      levels: levelNames(all),
      legend: levelLegend(all),
      state: { ...state, page },
      now: new Date().toISOString(),
      // Where a team has nothing of its own yet, a finished one shows what becomes of files.
      example: all.length === 0 ? ((await loadExample({ actor }))?.ensemble.id ?? null) : null,
      limits: `${formatBytes(env().MAX_FILE_BYTES)} each`,
    };
  });
}

/** One act a form: `intent` says which, `ensemble` on what. */
export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    try {
      return await act(actor, params.team, form);
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

const refused = (message: string) => data({ ok: false, message } satisfies ActAnswer, { status: 400 });

async function act(actor: Actor, teamId: string, form: FormData) {
  const text = (name: string) => String(form.get(name) ?? "");
  const ensembleId = text("ensemble");
  const done: ActAnswer = { ok: true };
  switch (text("intent")) {
    case "new-series": {
      const name = seriesNameSchema.safeParse(text("name"));
      if (!name.success) return refused("A series has a name of 1 to 120 characters.");
      const { id } = await createSeries({ actor, teamId, name: name.data });
      return { ok: true, seriesId: id } satisfies ActAnswer;
    }
    case "rename": {
      const name = ensembleNameSchema.safeParse(text("name"));
      if (!name.success) return refused("An ensemble has a name of 1 to 200 characters.");
      await renameEnsemble({ actor, ensembleId, name: name.data });
      return done;
    }
    case "move":
      await moveEnsemble({ actor, ensembleId, seriesId: text("series") });
      return done;
    case "delete":
      await deleteEnsemble({ actor, ensembleId });
      return done;
    case "restore":
      await restoreEnsemble({ actor, ensembleId });
      return done;
    default:
      return refused("This page has no such act. Load it again.");
  }
}

export default function Page({ loaderData }: Route.ComponentProps) {
  return <SeriesPage data={loaderData} />;
}
