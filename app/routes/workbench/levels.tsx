import type { ShouldRevalidateFunctionArgs } from "react-router";
import { LevelsSection } from "~/components/levels/levels-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { forPage } from "~/services/http.server";
import { loadLevelEnergies } from "~/services/levels/load-level-energies.server";
import type { Route } from "./+types/levels";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Levels", matches);
}

export async function loader({ params, context }: Route.LoaderArgs) {
  const energies = await forPage(context.get(requestIdContext), () =>
    loadLevelEnergies({ actor: context.get(actorContext), ensembleId: params.id }),
  );
  return { energies };
}

/** What is compared, and how, is answered in the browser. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  formMethod,
  defaultShouldRevalidate,
}: ShouldRevalidateFunctionArgs) {
  const act = formMethod !== undefined && formMethod !== "GET";
  if (act || currentUrl.pathname !== nextUrl.pathname || currentUrl.href === nextUrl.href) {
    return defaultShouldRevalidate;
  }
  return false;
}

export default function Levels({ loaderData }: Route.ComponentProps) {
  return <LevelsSection energies={loaderData.energies} />;
}
