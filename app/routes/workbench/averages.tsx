import { data, type ShouldRevalidateFunctionArgs } from "react-router";
import { AveragesSection } from "~/components/averages/averages-section";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readState } from "~/lib/url-state";
import { readForm } from "~/routes/read-form.server";
import type { Actor } from "~/services/auth/access.server";
import { keepMeasured } from "~/services/averages/keep-measured.server";
import { keepMeasuredProperties } from "~/services/averages/keep-measured-properties.server";
import { loadAverages } from "~/services/averages/load-averages.server";
import { addObservable, observableRequestSchema } from "~/services/averages/observe.server";
import { setRule } from "~/services/averages/set-rule.server";
import { joinAtoms, splitAtoms } from "~/services/averages/split-atoms.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/averages";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Averages", matches);
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const { sift } = readState(url.searchParams);
  const view = await forPage(context.get(requestIdContext), () =>
    loadAverages({ actor: context.get(actorContext), ensembleId: params.id, siftId: sift }),
  );
  return { view };
}

/** One act a form: `intent` says which. */
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
    case "rule":
      await setRule({ actor, ensembleId, columnId: text("column"), rule: text("rule") });
      return { ok: true, done: { intent: "rule" } } satisfies ActAnswer;
    case "observe": {
      const request = observableRequestSchema.safeParse(readObservable(text));
      if (!request.success) {
        const message = "Pick two, three or four atoms, and write A, B and C as numbers, for example 7.76.";
        return data({ ok: false, message } satisfies ActAnswer, { status: 400 });
      }
      const { id, name } = await addObservable({ actor, ensembleId, request: request.data });
      return { ok: true, done: { intent: "observe", column: { id, name } } } satisfies ActAnswer;
    }
    case "split":
      await splitAtoms({ actor, ensembleId, parts: readParts(text("parts")) });
      return { ok: true, done: { intent: "split" } } satisfies ActAnswer;
    case "join":
      await joinAtoms({ actor, ensembleId, atom: Number(text("atom")) });
      return { ok: true, done: { intent: "join" } } satisfies ActAnswer;
    case "measured": {
      const asked = { record: text("record"), version: Number(text("version")) };
      await keepMeasured({ actor, ensembleId, ...asked });
      return { ok: true, done: { intent: "measured" } } satisfies ActAnswer;
    }
    case "measured-properties": {
      const asked = { record: text("record"), version: Number(text("version")) };
      await keepMeasuredProperties({ actor, ensembleId, ...asked });
      return { ok: true, done: { intent: "measured-properties" } } satisfies ActAnswer;
    }
    default:
      throw notFound();
  }
}

/** "10,11;12": atoms from 1, a part after the other. */
function readParts(text: string): number[][] {
  return text.split(";").map((part) => part.split(",").map(Number));
}

function readObservable(text: (name: string) => string) {
  const own =
    text("a") === "" ? undefined : { a: Number(text("a")), b: Number(text("b")), c: Number(text("c")) };
  return {
    observable: text("observable"),
    atoms: text("atoms").split(",").map(Number),
    rule: text("rule") || undefined,
    merge: text("merge") === "on",
    set: text("set") || undefined,
    own,
  };
}

/** Temperature, error and property are answered in the browser; another sift asks the server again. */
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

export default function Averages({ loaderData }: Route.ComponentProps) {
  return <AveragesSection view={loaderData.view} />;
}
