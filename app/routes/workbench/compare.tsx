import type { ShouldRevalidateFunctionArgs } from "react-router";
import type { OutsideAnswerToForm } from "~/components/outside/add-structure";
import { CompareSection } from "~/components/outside/compare-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readForm } from "~/routes/read-form.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import { addOutside } from "~/services/outside/add-outside.server";
import { listOutside } from "~/services/outside/list-outside.server";
import { removeOutside } from "~/services/outside/remove-outside.server";
import type { Route } from "./+types/compare";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Against an outside structure", matches);
}

export async function loader({ params, context }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  return forPage(context.get(requestIdContext), async () => ({
    structures: await listOutside({ actor, ensembleId: params.id }),
  }));
}

/** A form with a file adds it; one with `intent` removes a structure or brings it back. */
export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  const ensembleId = params.id;
  return forPage(context.get(requestIdContext), async () => {
    try {
      const contentType = request.headers.get("content-type");
      if (/^multipart\/form-data\b/i.test(contentType ?? "")) {
        const form = openForm({ body: request.body, contentType });
        const { id, name } = await addOutside({ actor, ensembleId, form });
        return { ok: true, id, name } satisfies OutsideAnswerToForm;
      }
      const form = await readForm(request);
      const outsideId = String(form.get("outside") ?? "");
      const intent = form.get("intent");
      if (intent !== "remove" && intent !== "restore") throw notFound();
      const { name } = await removeOutside({ actor, ensembleId, outsideId, undo: intent === "restore" });
      return { ok: true, id: outsideId, name } satisfies OutsideAnswerToForm;
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

/** What is chosen on the page does not concern the list; a structure that is named may be a new one. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  defaultShouldRevalidate,
  formMethod,
}: ShouldRevalidateFunctionArgs) {
  if (formMethod !== undefined || currentUrl.pathname !== nextUrl.pathname) return defaultShouldRevalidate;
  if (currentUrl.href === nextUrl.href) return defaultShouldRevalidate;
  return currentUrl.searchParams.get("outside") !== nextUrl.searchParams.get("outside");
}

export default function Compare({ loaderData }: Route.ComponentProps) {
  return <CompareSection structures={loaderData.structures} />;
}
