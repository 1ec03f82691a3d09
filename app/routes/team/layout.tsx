import { href, Outlet, useLocation } from "react-router";
import { AppShell } from "~/components/layout/app-shell";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { actorContext, requestIdContext } from "~/context";
import { requireObjectMiddleware } from "~/middleware/require-access.server";
import { requireUserMiddleware } from "~/middleware/require-user.server";
import { forPage } from "~/services/http.server";
import { loadTeam } from "~/services/teams/load-team.server";
import type { Route } from "./+types/layout";

export const middleware: Route.MiddlewareFunction[] = [requireUserMiddleware, requireObjectMiddleware];

export const handle: ShellHandle<Awaited<ReturnType<typeof loader>>> = {
  crumbs: ({ team }) => [{ label: team.name, to: href("/teams/:team", { team: team.id }) }],
};

export async function loader({ params, context }: Route.LoaderArgs) {
  const team = await forPage(context.get(requestIdContext), () =>
    loadTeam(context.get(actorContext), params.team),
  );
  return { team };
}

export default function TeamLayout() {
  return (
    <AppShell results={useLocation().pathname.endsWith("/windows")}>
      <Outlet />
    </AppShell>
  );
}
