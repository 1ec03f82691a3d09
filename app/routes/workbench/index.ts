import { href, redirect } from "react-router";
import { actorContext, requestIdContext } from "~/context";
import { loadEnsemble } from "~/services/ensembles/load-ensemble.server";
import { forPage } from "~/services/http.server";
import type { Route } from "./+types/index";

/** Leads to what the ensemble is ready for: populations, or intake while something is open. */
export async function loader({ params, context, url }: Route.LoaderArgs) {
  const ensemble = await forPage(context.get(requestIdContext), () =>
    loadEnsemble({ actor: context.get(actorContext), ensembleId: params.id }),
  );
  const ready = ensemble.openQuestions === 0 && ensemble.accepted > 0;
  const to = ready
    ? href("/ensembles/:id/populations", { id: ensemble.id })
    : href("/ensembles/:id/intake", { id: ensemble.id });
  return redirect(to + url.search);
}

/** Never seen; with it, a refusal is shown as a page and not as bare data. */
export default function Index() {
  return null;
}
