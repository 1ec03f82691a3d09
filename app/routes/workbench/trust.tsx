import type { ShouldRevalidateFunctionArgs } from "react-router";
import { TrustSection } from "~/components/trust/trust-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readState } from "~/lib/url-state";
import { loadAverages } from "~/services/averages/load-averages.server";
import { loadTrust } from "~/services/averages/load-trust.server";
import { forPage } from "~/services/http.server";
import type { Route } from "./+types/trust";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Trust", matches);
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const ensembleId = params.id;
  const { sift } = readState(url.searchParams);
  return forPage(context.get(requestIdContext), async () => {
    const [averages, trust] = await Promise.all([
      loadAverages({ actor, ensembleId, siftId: sift, properties: false }),
      loadTrust({ actor, ensembleId }),
    ]);
    return { averages, trust };
  });
}

/** Temperature and error are answered in the browser; another sift asks the server again. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  formMethod,
  defaultShouldRevalidate,
}: ShouldRevalidateFunctionArgs) {
  const acted = formMethod !== undefined && formMethod !== "GET";
  if (acted || currentUrl.pathname !== nextUrl.pathname || currentUrl.href === nextUrl.href) {
    return defaultShouldRevalidate;
  }
  return currentUrl.searchParams.get("sift") !== nextUrl.searchParams.get("sift");
}

export default function Trust({ loaderData }: Route.ComponentProps) {
  return <TrustSection averages={loaderData.averages} trust={loaderData.trust} />;
}
