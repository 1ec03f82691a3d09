import { data, href, redirect } from "react-router";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { DistinctSetSection } from "~/components/workbench/distinct-set-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { readNumber } from "~/lib/format";
import { type SiftRequest, siftRequestSchema } from "~/lib/recipe/recipe";
import { readState, searchOf, writeState } from "~/lib/url-state";
import { readForm } from "~/routes/read-form.server";
import { accessEnsemble } from "~/services/auth/access.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import { createSift } from "~/services/sifts/create-sift.server";
import { getSift } from "~/services/sifts/get-sift.server";
import type { Route } from "./+types/distinct-set";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Distinct set", matches);
}

/** Most sifts are over by then; the page says of the others how far they are. */
const WAIT_SECONDS = 10;

/** The form that stands where no script moves the settings: it asks for a sift and shows it. */
export async function action({ request, params, context, url }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    if (form.get("intent") !== "sift") throw notFound();
    const { ensembleId } = await accessEnsemble(actor, "compute", params.id);
    const asked = readRequest(form);
    if (typeof asked === "string") {
      return data({ ok: false, message: asked } satisfies ActAnswer, { status: 422 });
    }
    try {
      const { id } = await createSift({ actor, ensembleId, request: asked });
      await getSift({
        actor,
        siftId: id,
        waitSeconds: WAIT_SECONDS,
        stateOnly: true,
        signal: request.signal,
      });
      const search = searchOf(writeState({ ...readState(url.searchParams), sift: id }, url.searchParams));
      return redirect(`${href("/ensembles/:id/distinct-set", { id: ensembleId })}${search}`, 303);
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

/** The request that the fields state, or in words which of them is wrong. */
function readRequest(form: FormData): SiftRequest | string {
  const text = (name: string) => String(form.get(name) ?? "").trim();
  const rmsd = readNumber(text("rmsdTolerance"), "Å");
  if (rmsd.value === null) return rmsd.fault ?? "An RMSD tolerance from 0 to 100 Å, for example 0.200.";
  const numbers: { energyTolerance: number | null; window: number | null } = {
    energyTolerance: null,
    window: null,
  };
  for (const name of ["energyTolerance", "window"] as const) {
    if (text(name) === "") continue;
    const read = readNumber(text(name), "kcal/mol");
    if (read.value === null) return read.fault ?? "Energies are numbers in kcal/mol, for example 0.15.";
    numbers[name] = read.value;
  }
  const asked = siftRequestSchema.safeParse({
    level: text("level") === "" ? null : text("level"),
    rmsdTolerance: rmsd.value,
    ...(text("level") === "" ? { window: null } : numbers),
    atoms: text("atoms"),
    mirror: text("mirror"),
    chirality: text("chirality"),
    symmetry: text("symmetry") !== "off",
  });
  return asked.success
    ? asked.data
    : "A tolerance lies from 0 on, the RMSD tolerance up to 100 Å: look at the numbers again.";
}

export default function DistinctSet() {
  return <DistinctSetSection />;
}
