import { href } from "react-router";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { type WindowSetting, WindowsPage, type WindowsPageData } from "~/components/levels/windows-page";
import { actorContext, requestIdContext } from "~/context";
import { readTyped } from "~/lib/format";
import { pooledWindow } from "~/lib/levels/pooled";
import { STANDARD_TEMPERATURE_K } from "~/lib/units";
import { TEMPERATURE_RANGE_K } from "~/lib/url-state";
import { listSeries } from "~/services/ensembles/list-series.server";
import { forPage, notFound } from "~/services/http.server";
import { loadSeriesLevels } from "~/services/levels/load-series-levels.server";
import { loadTeam } from "~/services/teams/load-team.server";
import type { Route } from "./+types/windows";

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `Windows · ${loaderData?.chosen?.name ?? loaderData?.team.name ?? "Series"} · Lowlying` }];
}

export const handle: ShellHandle<WindowsPageData> = {
  crumbs: ({ team, chosen }) => [
    ...(chosen
      ? [{ label: chosen.name, to: `${href("/teams/:team", { team: team.id })}?series=${chosen.id}` }]
      : []),
    { label: "Windows" },
  ],
};

/** A number of the address within bounds; for what is none the default counts, and the page says so at the field. */
function numberOf(
  params: URLSearchParams,
  key: WindowSetting,
  [least, most]: readonly [number, number],
  fallback: number,
  refused: WindowsPageData["refused"],
): number {
  const text = (params.get(key) ?? "").trim();
  if (text === "") return fallback;
  const value = readTyped(text, key === "T" ? "K" : "%");
  if (value !== null && value >= least && value <= most) return value;
  refused[key] = text.slice(0, 40);
  return fallback;
}

export async function loader({ params, context, url }: Route.LoaderArgs): Promise<WindowsPageData> {
  const actor = context.get(actorContext);
  const asked = url.searchParams;
  const refused: WindowsPageData["refused"] = {};
  const temperatureK = numberOf(asked, "T", TEMPERATURE_RANGE_K, STANDARD_TEMPERATURE_K, refused);
  const share = numberOf(asked, "keep", [1, 100], 95, refused) / 100;
  const ofMolecules = numberOf(asked, "for", [1, 100], 90, refused) / 100;
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
      refused,
      found,
      pooled: found.molecules.length === 0 ? null : pooledWindow(found.molecules, settings),
    };
  });
}

export default function Windows({ loaderData }: Route.ComponentProps) {
  return <WindowsPage {...loaderData} />;
}
