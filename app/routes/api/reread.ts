import { rereadRequestSchema } from "~/lib/api/schemas";
import { accessEnsemble } from "~/services/auth/access.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { rereadAnswers } from "~/services/ensembles/reread-answers";
import { rereadEnsemble } from "~/services/ensembles/reread-ensemble.server";
import { answerCall, json, readJsonOrForm } from "./answer-call.server";

export const action = answerCall({
  async POST({ actor, params, request }) {
    const { teamId, ensembleId } = await accessEnsemble(actor, "take-in", params.id ?? "");
    const asked = await readJsonOrForm(request, rereadRequestSchema);
    await rereadEnsemble({ actor, ensembleId, ...rereadAnswers(asked), given: asked.answers });
    return json(await describeEnsemble(teamId, ensembleId));
  },
});
export const loader = action;
