import { type ShouldRevalidateFunctionArgs, useActionData } from "react-router";
import type { OutsideAnswerToForm } from "~/components/outside/add-structure";
import { CompareSection } from "~/components/outside/compare-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readOutsideChoice } from "~/lib/outside/choice";
import { readState } from "~/lib/url-state";
import { readForm } from "~/routes/read-form.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import { addOutside } from "~/services/outside/add-outside.server";
import { loadOutside } from "~/services/outside/load-outside.server";
import { removeOutside } from "~/services/outside/remove-outside.server";
import type { Route } from "./+types/compare";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Against an outside structure", matches);
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const { sift: siftId } = readState(url.searchParams);
  const choice = readOutsideChoice(url.searchParams);
  return forPage(context.get(requestIdContext), () =>
    loadOutside({ actor, ensembleId: params.id, siftId, choice }),
  );
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
        const added = await addOutside({ actor, ensembleId, form });
        return { ok: true, ...added } satisfies OutsideAnswerToForm;
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

/** What the server compared; the rest of what is chosen is answered in the browser. */
const COMPARED = ["outside", "set", "hand", "sift"];

export function shouldRevalidate({
  currentUrl,
  nextUrl,
  defaultShouldRevalidate,
  formMethod,
}: ShouldRevalidateFunctionArgs) {
  if (formMethod !== undefined || currentUrl.pathname !== nextUrl.pathname) return defaultShouldRevalidate;
  if (currentUrl.href === nextUrl.href) return defaultShouldRevalidate;
  return COMPARED.some((key) => currentUrl.searchParams.get(key) !== nextUrl.searchParams.get(key));
}

export default function Compare(_: Route.ComponentProps) {
  // Without script the answer to a form comes with the page.
  return <CompareSection answered={useActionData<typeof action>()} />;
}
