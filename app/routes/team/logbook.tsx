import { data, href, useLocation } from "react-router";
import { pageClass } from "~/components/layout/app-shell";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { LogbookFilters } from "~/components/logbook/logbook-filters";
import { logbookFinding } from "~/components/logbook/logbook-finding";
import { LogbookList } from "~/components/logbook/logbook-list";
import { RemarkForm } from "~/components/logbook/remark-form";
import { TeamTabs } from "~/components/team/team-tabs";
import { Finding } from "~/components/ui/finding";
import { actorContext, requestIdContext } from "~/context";
import { hidesSomething, readFilter } from "~/lib/logbook/filter";
import { readForm } from "~/routes/read-form.server";
import { listSeries } from "~/services/ensembles/list-series.server";
import { forPage, refuseForm } from "~/services/http.server";
import { loadTeamLogbook } from "~/services/logbook/load-logbook.server";
import { remarkSchema, writeTeamRemark } from "~/services/logbook/write-remark.server";
import { loadTeam } from "~/services/teams/load-team.server";
import type { Route } from "./+types/logbook";

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `Logbook of ${loaderData?.team.name ?? "the team"} · Lowlying` }];
}

export const handle: ShellHandle = { crumbs: () => [{ label: "Logbook" }] };

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const teamId = params.team;
  const filter = readFilter(url.searchParams);
  return forPage(context.get(requestIdContext), async () => {
    const [team, series, page] = await Promise.all([
      loadTeam(actor, teamId),
      listSeries({ actor, teamId }),
      loadTeamLogbook({ actor, teamId, filter }),
    ]);
    return { team, series, page, filter };
  });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  return forPage(context.get(requestIdContext), async () => {
    const text = remarkSchema.safeParse((await readForm(request)).get("text"));
    if (!text.success) return data({ message: text.error.issues[0]?.message ?? "" }, { status: 400 });
    try {
      await writeTeamRemark({ actor: context.get(actorContext), teamId: params.team, text: text.data });
    } catch (error) {
      return refuseForm(error, {});
    }
    return { ok: true as const };
  });
}

/** Who did and decided what in the whole team. */
export default function TeamLogbook({ loaderData }: Route.ComponentProps) {
  const { team, series, page, filter } = loaderData;
  const { search } = useLocation();
  return (
    <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
      <h1 className="text-lg font-semibold tracking-title sm:text-xl">Logbook of {team.name}</h1>
      <Finding wide more="Nothing in it can be changed or removed. Times are UTC.">
        {logbookFinding(page.rows, page.older, hidesSomething(filter))}
      </Finding>
      <TeamTabs team={team.id} series={series} chosen={null} at="logbook" />
      <div className="mt-6 max-w-[72rem]">
        <LogbookFilters
          filter={filter}
          people={page.people}
          csv={`${href("/files/teams/:team/logbook.csv", { team: team.id })}${search}`}
        />
        {page.mayRemark ? <RemarkForm /> : null}
        <LogbookList rows={page.rows} older={page.older} total={page.total} ensembles />
      </div>
    </div>
  );
}
