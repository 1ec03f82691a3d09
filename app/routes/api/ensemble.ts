import { accessEnsemble } from "~/services/auth/access.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { answerCall, json } from "./answer-call.server";

export const loader = answerCall({
  async GET({ actor, params }) {
    const { teamId, ensembleId } = await accessEnsemble(actor, "read", params.id ?? "");
    return json(await describeEnsemble(teamId, ensembleId));
  },
});
export const action = loader;
