import { answersRequestSchema } from "~/lib/api/schemas";
import { accessEnsemble } from "~/services/auth/access.server";
import { answerQuestions } from "~/services/ensembles/answer-questions.server";
import { describeIntake } from "~/services/ensembles/describe-ensemble.server";
import { answerCall, json, readJson } from "./answer-call.server";

export const action = answerCall({
  async POST({ actor, params, request }) {
    const { teamId, ensembleId } = await accessEnsemble(actor, "take-in", params.id ?? "");
    const { answers } = await readJson(request, answersRequestSchema);
    await answerQuestions({ actor, ensembleId, answers });
    return json({ intake: await describeIntake(teamId, ensembleId) });
  },
});
export const loader = action;
