import { data } from "react-router";
import { pageClass } from "~/components/layout/app-shell";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { type MadeToken, MadeTokenPanel, NewToken } from "~/components/team/new-token";
import { TeamTabs } from "~/components/team/team-tabs";
import { TokenTable } from "~/components/team/token-table";
import { Finding } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { actorContext, requestIdContext } from "~/context";
import { env } from "~/env.server";
import { capital, pluralWord } from "~/lib/format";
import { readForm } from "~/routes/read-form.server";
import { listSeries } from "~/services/ensembles/list-series.server";
import { forPage, refuseForm } from "~/services/http.server";
import { loadTeam } from "~/services/teams/load-team.server";
import { createToken, newTokenSchema } from "~/services/tokens/create-token.server";
import { listTokens } from "~/services/tokens/list-tokens.server";
import { revokeToken } from "~/services/tokens/revoke-token.server";
import type { Route } from "./+types/tokens";

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `Tokens of ${loaderData?.team.name ?? "the team"} · Lowlying` }];
}

export const handle: ShellHandle = { crumbs: () => [{ label: "Tokens" }] };

export async function loader({ params, context }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const teamId = params.team;
  return forPage(context.get(requestIdContext), async () => {
    const [team, series, tokens] = await Promise.all([
      loadTeam(actor, teamId),
      listSeries({ actor, teamId }),
      listTokens({ actor, teamId }),
    ]);
    return { team, series, tokens, origin: env().APP_ORIGIN, now: new Date().toISOString() };
  });
}

interface TokenAnswer {
  ok?: boolean;
  message?: string;
  made?: MadeToken;
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  const teamId = params.team;
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    try {
      if (form.get("intent") === "revoke") {
        await revokeToken({ actor, teamId, tokenId: String(form.get("token") ?? "") });
        return { ok: true } satisfies TokenAnswer;
      }
      const token = newTokenSchema.safeParse({
        name: form.get("name"),
        scope: form.get("scope"),
        days: form.get("days"),
      });
      if (!token.success) {
        const message = token.error.issues[0]?.message ?? "Fill in the form and send it again.";
        return data({ message } satisfies TokenAnswer, { status: 400 });
      }
      const made = await createToken({ actor, teamId, token: token.data });
      return {
        ok: true,
        made: {
          secret: made.token,
          name: token.data.name,
          scope: token.data.scope,
          endsAt: made.endsAt.toISOString(),
        },
      } satisfies TokenAnswer;
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  const { team, series, tokens, origin, now } = loaderData;
  const answer = actionData as TokenAnswer | undefined;
  const live = tokens.filter((token) => !token.ended).length;
  return (
    <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
      <h1 className="text-lg font-semibold tracking-title sm:text-xl">Tokens of {team.name}</h1>
      <Finding wide>
        {capital(pluralWord(live, "token"))}
        {team.role === "owner" ? "" : " of yours"} {live === 1 ? "works" : "work"} in this team. A token lets
        a program send files and fetch results without a browser.
      </Finding>
      <TeamTabs team={team.id} series={series} chosen={null} at="tokens" />
      <div className="mt-8 grid items-start gap-x-12 gap-y-8 lg:grid-cols-[minmax(0,1fr)_20rem] xl:grid-cols-[minmax(0,1fr)_22.5rem]">
        <div className="grid gap-8">
          {answer?.made ? <MadeTokenPanel made={answer.made} origin={origin} /> : null}
          {tokens.length > 0 ? (
            <TokenTable tokens={tokens} team={team.id} now={now} />
          ) : (
            <StatePanel level="h2" title="No tokens yet">
              Make one to send files from a batch job, or to read results from a script.
            </StatePanel>
          )}
        </div>
        <NewToken role={team.role} error={answer?.message} />
      </div>
    </div>
  );
}
