import { data, type ShouldRevalidateFunctionArgs } from "react-router";
import type { HandOverAnswer } from "~/components/hand-over/answer";
import { HandOverSection } from "~/components/workbench/hand-over-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { env } from "~/env.server";
import { readAveragesState } from "~/lib/averages/averages-state";
import { readState } from "~/lib/url-state";
import { readForm } from "~/routes/read-form.server";
import { editionNumber } from "~/routes/share/share-call.server";
import { type Actor, accessEnsemble } from "~/services/auth/access.server";
import { askToVerify } from "~/services/editions/ask-to-verify.server";
import { freezeEdition, freezeSchema } from "~/services/editions/freeze-edition.server";
import { loadHandOver } from "~/services/editions/load-hand-over.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import { endLink } from "~/services/links/end-link.server";
import { makeLink, newLinkSchema } from "~/services/links/make-link.server";
import { describeExports } from "~/services/sifts/describe-exports.server";
import { loadSift } from "~/services/sifts/load-sift.server";
import type { Route } from "./+types/hand-over";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Hand-over", matches);
}

/** Numbers of two editions to compare, 0 for what is none; null where the address asks for no comparison. */
function comparedIn(params: URLSearchParams): [number, number] | null {
  if (!params.has("from") && !params.has("to")) return null;
  const numberIn = (name: string) => Math.max(0, editionNumber(params.get(name) ?? ""));
  return [numberIn("from"), numberIn("to")];
}

export async function loader({ params, context, url }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const ensembleId = params.id;
  const { sift: siftId, temperatureK: temperature, weights } = readState(url.searchParams);
  const { sigmaKcal, sigmaFrom } = readAveragesState(url.searchParams);
  return forPage(context.get(requestIdContext), async () => {
    const sift = await loadSift({ actor, ensembleId, siftId });
    const shown = { siftId: sift?.id ?? null, temperature, weights, error: { sigmaKcal, sigmaFrom } };
    const [files, view] = await Promise.all([
      sift === null ? null : describeExports({ actor, siftId: sift.id, temperature }),
      loadHandOver({ actor, ensembleId, ...shown, compare: comparedIn(url.searchParams) }),
    ]);
    return { siftId: sift?.result ? sift.id : null, files, view };
  });
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

const text = (form: FormData, name: string) => String(form.get(name) ?? "").trim();

async function act(actor: Actor, ensembleId: string, form: FormData) {
  const number = editionNumber(text(form, "number"));
  switch (text(form, "intent")) {
    case "freeze":
      // Whoever may not hears that, whatever the fields hold.
      await accessEnsemble(actor, "share", ensembleId);
      return freeze(actor, ensembleId, form);
    case "verify":
      await askToVerify({ actor, ensembleId, number });
      return { ok: true } satisfies HandOverAnswer;
    case "make-link":
      return makeOne(actor, ensembleId, number, form);
    case "end-link":
      await endLink({ actor, linkId: text(form, "link") });
      return { ok: true } satisfies HandOverAnswer;
    default:
      throw notFound();
  }
}

interface Issues {
  issues: readonly { path: PropertyKey[]; message: string }[];
}

/** What a form is told: the first sentence, and one for each field. */
function refused({ issues }: Issues) {
  const fields = Object.fromEntries(issues.map(({ path, message }) => [String(path[0] ?? ""), message]));
  const message = issues[0]?.message ?? "Fill in the form and send it again.";
  return data({ message, fields } satisfies HandOverAnswer, { status: 400 });
}

const numbersIn = (list: string) => list.split(",").filter(Boolean).map(Number);

async function freeze(actor: Actor, ensembleId: string, form: FormData) {
  const asked = freezeSchema.safeParse({
    sift: text(form, "sift"),
    temperature: Number(text(form, "temperature")),
    weights: text(form, "weights"),
    title: text(form, "title"),
    remark: text(form, "remark"),
    sigma: text(form, "sigma") === "" ? undefined : Number(text(form, "sigma")),
    sigmaFrom: text(form, "sigmaFrom") || null,
    temperatures: form.has("temperatures") ? numbersIn(text(form, "temperatures")) : undefined,
  });
  if (!asked.success) return refused(asked.error);
  const { number } = await freezeEdition({ actor, ensembleId, request: asked.data });
  return { ok: true, frozen: number } satisfies HandOverAnswer;
}

async function makeOne(actor: Actor, ensembleId: string, number: number, form: FormData) {
  const asked = newLinkSchema.safeParse({
    label: text(form, "label"),
    contact: text(form, "contact"),
    days: text(form, "days") === "" ? Number.NaN : Number(text(form, "days")),
    sources: form.get("sources") === "1",
    logbook: form.get("logbook") === "1",
    email: text(form, "email").trim() || null,
  });
  if (!asked.success) return refused(asked.error);
  const made = await makeLink({ actor, ensembleId, number, link: asked.data });
  return {
    ok: true,
    made: {
      address: `${env().APP_ORIGIN}/e/${made.secret}`,
      label: asked.data.label,
      endsAt: made.endsAt.toISOString(),
      edition: number,
      mailedTo: asked.data.email ?? null,
    },
  } satisfies HandOverAnswer;
}

/** Files and methods hang on the sift, the temperature and the weights; the rest on acts alone. */
export function shouldRevalidate({
  currentUrl,
  nextUrl,
  defaultShouldRevalidate,
  formMethod,
}: ShouldRevalidateFunctionArgs) {
  const sent = formMethod !== undefined && formMethod !== "GET";
  if (sent || currentUrl.pathname !== nextUrl.pathname) return defaultShouldRevalidate;
  if (currentUrl.href === nextUrl.href) return defaultShouldRevalidate;
  return ["sift", "T", "weights", "sig", "sigref", "from", "to"].some(
    (name) => currentUrl.searchParams.get(name) !== nextUrl.searchParams.get(name),
  );
}

export default function HandOver({ loaderData, actionData }: Route.ComponentProps) {
  return (
    <HandOverSection
      siftId={loaderData.siftId}
      files={loaderData.files}
      view={loaderData.view}
      answer={actionData as HandOverAnswer | undefined}
    />
  );
}
