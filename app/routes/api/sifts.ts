import { siftRequestSchema } from "~/lib/recipe/recipe";
import { accessEnsemble } from "~/services/auth/access.server";
import { createSift } from "~/services/sifts/create-sift.server";
import { answerCall, json, readJson } from "./answer-call.server";

const answer = answerCall({
  async POST({ actor, params, request, url }) {
    const { ensembleId } = await accessEnsemble(actor, "compute", params.id ?? "");
    const asked = await readJson(request, siftRequestSchema);
    const sift = await createSift({ actor, ensembleId, request: asked });
    const base = url.pathname.startsWith("/files/") ? "/files" : "/api/v1";
    return json(sift, { status: 202, location: `${base}/sifts/${sift.id}` });
  },
});

export const loader = answer;
export const action = answer;
