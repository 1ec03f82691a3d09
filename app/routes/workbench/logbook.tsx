import { data, type ShouldRevalidateFunctionArgs, useLocation } from "react-router";
import { LogbookSection } from "~/components/workbench/logbook-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readFilter } from "~/lib/logbook/filter";
import { readForm } from "~/routes/read-form.server";
import { forPage, refuseForm } from "~/services/http.server";
import { loadLogbook } from "~/services/logbook/load-logbook.server";
import { remarkSchema, writeRemark } from "~/services/logbook/write-remark.server";
import type { Route } from "./+types/logbook";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Logbook", matches);
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const filter = readFilter(url.searchParams);
  const page = await forPage(context.get(requestIdContext), () =>
    loadLogbook({ actor: context.get(actorContext), ensembleId: params.id, filter }),
  );
  return { page, filter };
}

export async function action({ request, params, context }: Route.ActionArgs) {
  return forPage(context.get(requestIdContext), async () => {
    const text = remarkSchema.safeParse((await readForm(request)).get("text"));
    if (!text.success) return data({ message: text.error.issues[0]?.message ?? "" }, { status: 400 });
    try {
      await writeRemark({ actor: context.get(actorContext), ensembleId: params.id, text: text.data });
    } catch (error) {
      return refuseForm(error, {});
    }
    return { ok: true as const };
  });
}

/** What is selected in the workbench does not concern the logbook; its own filters do. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  defaultShouldRevalidate,
  formMethod,
}: ShouldRevalidateFunctionArgs) {
  const sent = formMethod !== undefined && formMethod !== "GET";
  if (sent || currentUrl.pathname !== nextUrl.pathname) return defaultShouldRevalidate;
  if (currentUrl.href === nextUrl.href) return defaultShouldRevalidate;
  return ["before", "kind", "who", "when", "text"].some(
    (name) => currentUrl.searchParams.get(name) !== nextUrl.searchParams.get(name),
  );
}

export default function Logbook({ loaderData }: Route.ComponentProps) {
  const { search } = useLocation();
  return <LogbookSection {...loaderData} search={search} />;
}
