import { data, useOutletContext } from "react-router";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { IntakeSection } from "~/components/workbench/intake-section";
import { REREAD_ANSWER } from "~/components/workbench/read-again";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { rereadRequestSchema, uploadFieldsSchema } from "~/lib/api/schemas";
import { readTyped } from "~/lib/format";
import type { IntakeView } from "~/lib/views";
import { readForm } from "~/routes/read-form.server";
import type { Actor } from "~/services/auth/access.server";
import { answerQuestions } from "~/services/ensembles/answer-questions.server";
import { ASK_AGAIN } from "~/services/ensembles/changed-reading";
import { holdFrame, releaseFrame } from "~/services/ensembles/decide-frame.server";
import { ensembleNameSchema, renameEnsemble } from "~/services/ensembles/rename-ensemble.server";
import { rereadAnswers } from "~/services/ensembles/reread-answers";
import { rereadEnsemble } from "~/services/ensembles/reread-ensemble.server";
import { splitOff } from "~/services/ensembles/split-off.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/intake";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Intake", matches);
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

/** As a program asks for it; a form sends the temperature as text. */
const rereadFormSchema = rereadRequestSchema.extend({
  energyTemperature: uploadFieldsSchema.shape.energyTemperature,
});
const REREAD_FIELDS = ["level", "energyUnit", "energyFrom", "energyKind", "energyTemperature"] as const;

const refused = (message: string) => data({ ok: false, message } satisfies ActAnswer, { status: 400 });

async function act(actor: Actor, ensembleId: string, form: FormData) {
  const text = (name: string) => String(form.get(name) ?? "").trim();
  const intent = text("intent");
  switch (intent) {
    case "answer": {
      const option = text("option");
      if (option === "" || option.length > 200)
        return refused("Choose one, or give a name of 1 to 120 characters.");
      await answerQuestions({ actor, ensembleId, answers: [{ id: text("question"), option }] });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    case "hold":
    case "release": {
      const reason = text("reason");
      if (!/^[1-9]\d{0,7}$/.test(text("frame")))
        return refused("Give the number of a frame, counted from 1.");
      if (reason === "" || reason.length > 500) return refused("Give the reason, in up to 500 characters.");
      const frame = Number(text("frame"));
      await (intent === "hold" ? holdFrame : releaseFrame)({ actor, ensembleId, frame, reason });
      return { ok: true, done: { intent, frame, reason } } satisfies ActAnswer;
    }
    case "split-off": {
      if (!/^[1-9]\d{0,7}$/.test(text("frame")))
        return refused("Give the number of a frame, counted from 1.");
      const made = await splitOff({ actor, ensembleId, frame: Number(text("frame")) });
      return { ok: true, done: { intent, made } } satisfies ActAnswer;
    }
    case "reread": {
      const kelvin = readTyped(text("energyTemperature"), "K");
      const typed = REREAD_FIELDS.map(
        (name) =>
          [name, name === "energyTemperature" && kelvin !== null ? String(kelvin) : text(name)] as const,
      );
      const asked = rereadFormSchema.safeParse(Object.fromEntries(typed.filter(([, value]) => value !== "")));
      if (!asked.success) return refused(asked.error.issues.map(({ message }) => message).join(" "));
      const given = [...form].flatMap(([name, value]) =>
        name.startsWith(REREAD_ANSWER) && typeof value === "string"
          ? [{ id: name.slice(REREAD_ANSWER.length), option: value === "" ? ASK_AGAIN : value }]
          : [],
      );
      await rereadEnsemble({ actor, ensembleId, ...rereadAnswers(asked.data), given });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    case "rename": {
      const name = ensembleNameSchema.safeParse(text("name"));
      if (!name.success) return refused("An ensemble has a name of 1 to 200 characters.");
      await renameEnsemble({ actor, ensembleId, name: name.data });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    default:
      throw notFound();
  }
}

export default function Intake() {
  return <IntakeSection intake={useOutletContext<IntakeView>()} />;
}
