import type { ShouldRevalidateFunctionArgs } from "react-router";
import { HandOverSection } from "~/components/workbench/hand-over-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readState } from "~/lib/url-state";
import { forPage } from "~/services/http.server";
import { describeExports } from "~/services/sifts/describe-exports.server";
import { loadSift } from "~/services/sifts/load-sift.server";
import type { Route } from "./+types/hand-over";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Hand-over", matches);
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const { sift: siftId, temperatureK } = readState(url.searchParams);
  return forPage(context.get(requestIdContext), async () => {
    const sift = await loadSift({ actor, ensembleId: params.id, siftId });
    if (sift === null) return { files: null };
    return { files: await describeExports({ actor, siftId: sift.id, temperature: temperatureK }) };
  });
}

/** The files hang on the sift and, by their populations, on the temperature; on nothing else that is selected. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  defaultShouldRevalidate,
  formMethod,
}: ShouldRevalidateFunctionArgs) {
  if (formMethod !== undefined || currentUrl.pathname !== nextUrl.pathname) return defaultShouldRevalidate;
  if (currentUrl.href === nextUrl.href) return defaultShouldRevalidate;
  return ["sift", "T"].some((name) => currentUrl.searchParams.get(name) !== nextUrl.searchParams.get(name));
}

export default function HandOver({ loaderData }: Route.ComponentProps) {
  return <HandOverSection files={loaderData.files} />;
}
