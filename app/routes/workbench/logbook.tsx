import type { ShouldRevalidateFunctionArgs } from "react-router";
import { LogbookSection } from "~/components/workbench/logbook-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { forPage } from "~/services/http.server";
import { loadLogbook } from "~/services/logbook/load-logbook.server";
import type { Route } from "./+types/logbook";

/** Entries the service gives at once; a full page means that there may be older ones. */
const PAGE = 200;

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Logbook", matches);
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const asked = url.searchParams.get("before");
  const before = asked !== null && /^[1-9]\d{0,14}$/.test(asked) ? Number(asked) : undefined;
  const rows = await forPage(context.get(requestIdContext), () =>
    loadLogbook({ actor: context.get(actorContext), ensembleId: params.id, before }),
  );
  return { rows, older: rows.length < PAGE ? null : (rows.at(-1)?.id ?? null) };
}

/** What is selected in the workbench does not concern the logbook. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  defaultShouldRevalidate,
  formMethod,
}: ShouldRevalidateFunctionArgs) {
  if (formMethod !== undefined || currentUrl.pathname !== nextUrl.pathname) return defaultShouldRevalidate;
  if (currentUrl.href === nextUrl.href) return defaultShouldRevalidate;
  return currentUrl.searchParams.get("before") !== nextUrl.searchParams.get("before");
}

export default function Logbook({ loaderData }: Route.ComponentProps) {
  return <LogbookSection {...loaderData} />;
}
