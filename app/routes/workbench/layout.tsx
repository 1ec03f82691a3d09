import { href, Outlet, type ShouldRevalidateFunctionArgs } from "react-router";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { WorkbenchPage } from "~/components/workbench/workbench-page";
import { actorContext, requestIdContext } from "~/context";
import { readState } from "~/lib/url-state";
import type { SiftView } from "~/lib/views";
import { requireObjectMiddleware } from "~/middleware/require-access.server";
import type { Actor } from "~/services/auth/access.server";
import { loadEnsemble } from "~/services/ensembles/load-ensemble.server";
import { loadIntake } from "~/services/ensembles/load-intake.server";
import { forPage } from "~/services/http.server";
import { loadSift } from "~/services/sifts/load-sift.server";
import type { Route } from "./+types/layout";

export const middleware: Route.MiddlewareFunction[] = [requireObjectMiddleware];

export const handle: ShellHandle<Awaited<ReturnType<typeof loader>>> = {
  crumbs: ({ ensemble: { team, series, name, role } }) => [
    // Guests of the example see no team to go to.
    ...(role === "guest"
      ? [{ label: "Example", to: href("/") }]
      : [
          { label: team.name, to: href("/teams/:team", { team: team.id }) },
          { label: series.name, to: `${href("/teams/:team", { team: team.id })}?series=${series.id}` },
        ]),
    { label: name },
  ],
};

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const ensembleId = params.id;
  const { sift } = readState(url.searchParams);
  return forPage(context.get(requestIdContext), async () => {
    const ensemble = await loadEnsemble({ actor, ensembleId });
    const [shown, intake] = await Promise.all([
      loadSift({ actor, ensembleId, siftId: sift }),
      loadIntake({ actor, ensembleId }),
    ]);
    return { ensemble, sift: shown, lastSet: await lastSetBeside(actor, ensembleId, shown), intake };
  });
}

/** A sift that came to nothing is no dead end: the set that stands for the ensemble otherwise, if there is one. */
async function lastSetBeside(actor: Actor, ensembleId: string, shown: SiftView | null) {
  if (shown?.status !== "failed" && shown?.status !== "cancelled") return null;
  const other = await loadSift({ actor, ensembleId });
  return other?.status === "done" ? other.id : null;
}

/** Temperature, selection and the like are answered in the browser: only another sift, or an act, asks the server again. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  formMethod,
  defaultShouldRevalidate,
}: ShouldRevalidateFunctionArgs) {
  if (formMethod !== undefined && formMethod !== "GET") return defaultShouldRevalidate;
  const same = currentUrl.pathname.split("/")[2] === nextUrl.pathname.split("/")[2];
  const moved = currentUrl.href !== nextUrl.href;
  if (!same || !moved) return defaultShouldRevalidate;
  return currentUrl.searchParams.get("sift") !== nextUrl.searchParams.get("sift");
}

export default function WorkbenchLayout({ loaderData }: Route.ComponentProps) {
  return (
    <WorkbenchPage {...loaderData}>
      <Outlet context={loaderData.intake} />
    </WorkbenchPage>
  );
}
