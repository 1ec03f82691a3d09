import { comparisonQuerySchema } from "~/lib/api/schemas";
import { accessEnsemble } from "~/services/auth/access.server";
import { compareLevelsOf } from "~/services/levels/compare-levels.server";
import { answerCall, json, readQuery } from "./answer-call.server";

export const loader = answerCall({
  async GET({ actor, url, params }) {
    const { ensembleId } = await accessEnsemble(actor, "read", params.id ?? "");
    return json(await compareLevelsOf({ actor, ensembleId, ...readQuery(url, comparisonQuerySchema) }));
  },
});
export const action = loader;
