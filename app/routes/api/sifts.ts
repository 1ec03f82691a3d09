import { siftRequestSchema } from "~/lib/recipe/recipe";
import { accessEnsemble } from "~/services/auth/access.server";
import { createSift } from "~/services/sifts/create-sift.server";
import { answerCall, json, readJson } from "./answer-call.server";

const answer = answerCall({
  async POST({ actor, params, request }) {
    const { ensembleId } = await accessEnsemble(actor, "compute", params.id ?? "");
    const sift = await createSift({ actor, ensembleId, request: await readJson(request, siftRequestSchema) });
    return json(sift, { status: 202, location: `/api/v1/sifts/${sift.id}` });
  },
});

export const loader = answer;
export const action = answer;
