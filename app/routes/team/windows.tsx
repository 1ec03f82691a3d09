import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { WindowsPage, type WindowsPageData } from "~/components/levels/windows-page";
import { actorContext, requestIdContext } from "~/context";
import { pooledWindow } from "~/lib/levels/pooled";
import { STANDARD_TEMPERATURE_K } from "~/lib/units";
import { listSeries } from "~/services/ensembles/list-series.server";
import { forPage, notFound } from "~/services/http.server";
import { loadSeriesLevels } from "~/services/levels/load-series-levels.server";
import { loadTeam } from "~/services/teams/load-team.server";
import type { Route } from "./+types/windows";

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `Windows · ${loaderData?.chosen?.name ?? loaderData?.team.name ?? "Series"} · Lowlying` }];
}

export const handle: ShellHandle<WindowsPageData> = { crumbs: () => [{ label: "Windows" }] };

/** A number of the address within bounds; what is none is the default. */
function numberOf(
  params: URLSearchParams,
  key: string,
  least: number,
  most: number,
  fallback: number,
): number {
  const text = params.get(key) ?? "";
  const value = /^\d{1,6}(\.\d{1,9})?$/.test(text) ? Number(text) : Number.NaN;
  return value >= least && value <= most ? value : fallback;
}

export async function loader({ params, context, url }: Route.LoaderArgs): Promise<WindowsPageData> {
  const actor = context.get(actorContext);
  const asked = url.searchParams;
  const temperatureK = numberOf(asked, "T", 100, 1000, STANDARD_TEMPERATURE_K);
  const share = numberOf(asked, "keep", 1, 100, 95) / 100;
  const ofMolecules = numberOf(asked, "for", 1, 100, 90) / 100;
  return forPage(context.get(requestIdContext), async () => {
    const teamId = params.team;
    const seriesId = asked.get("series") || undefined;
    const [team, series, found] = await Promise.all([
      loadTeam(actor, teamId),
      listSeries({ actor, teamId }),
      loadSeriesLevels({
        actor,
        teamId,
        series: seriesId,
        level: asked.get("level") || undefined,
        reference: asked.get("ref") || undefined,
      }),
    ]);
    const chosen = series.find(({ id }) => id === seriesId) ?? null;
    if (seriesId !== undefined && chosen === null) throw notFound();
    const settings = { share, ofMolecules, temperatureK };
    return {
      team: { id: team.id, name: team.name },
      series: series.map(({ id, name }) => ({ id, name })),
      chosen: chosen && { id: chosen.id, name: chosen.name },
      settings,
      found,
      pooled: found.molecules.length === 0 ? null : pooledWindow(found.molecules, settings),
    };
  });
}

export default function Windows({ loaderData }: Route.ComponentProps) {
  return <WindowsPage {...loaderData} />;
}
