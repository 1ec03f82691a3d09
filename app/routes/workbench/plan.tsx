import type { ShouldRevalidateFunctionArgs } from "react-router";
import { PlanSection } from "~/components/plan/plan-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readForm } from "~/routes/read-form.server";
import type { Actor } from "~/services/auth/access.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import { loadLevelEnergies } from "~/services/levels/load-level-energies.server";
import { listPlans, listRemovedPlans } from "~/services/plans/list-plans.server";
import { removePlans } from "~/services/plans/remove-plans.server";
import { savePlans } from "~/services/plans/save-plans.server";
import type { Route } from "./+types/plan";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Plan", matches);
}

export async function loader({ params, context }: Route.LoaderArgs) {
  const asked = { actor: context.get(actorContext), ensembleId: params.id };
  return forPage(context.get(requestIdContext), async () => {
    const [energies, saved, removed] = await Promise.all([
      loadLevelEnergies(asked),
      listPlans(asked),
      listRemovedPlans(asked),
    ]);
    return { energies, saved, removed };
  });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    try {
      return await act(actor, params.id, form);
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

async function act(actor: Actor, ensembleId: string, form: FormData) {
  const text = (name: string) => String(form.get(name) ?? "").trim();
  switch (text("intent")) {
    case "save": {
      const saved = await savePlans({
        actor,
        ensembleId,
        name: text("name"),
        plans: readJson(text("plans")),
        id: text("id") || undefined,
        version: Number(text("version")) || undefined,
      });
      return { ok: true as const, saved };
    }
    case "remove":
    case "restore":
      await removePlans({ actor, ensembleId, id: text("id"), undo: text("intent") === "restore" });
      return { ok: true as const, saved: null };
    default:
      throw notFound();
  }
}

/** What is no JSON is no plan either: the service says so. */
function readJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return null;
  }
}

/** The plan is worked out in the browser; only saving and removing ask again. */
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
  return false;
}

export default function PlanPage({ loaderData }: Route.ComponentProps) {
  return <PlanSection {...loaderData} />;
}
