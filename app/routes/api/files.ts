import { accessEnsemble } from "~/services/auth/access.server";
import { appendFiles } from "~/services/ensembles/append-files.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { withFramesRead } from "~/services/ensembles/frames-read.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { answerCall, json } from "./answer-call.server";

export const action = answerCall({
  async POST({ actor, params, request }) {
    const { teamId, ensembleId } = await accessEnsemble(actor, "take-in", params.id ?? "");
    const form = openForm({ body: request.body, contentType: request.headers.get("content-type") });
    const { added } = await withFramesRead(actor, request, (told) =>
      appendFiles({ actor, ensembleId, form, told }),
    );
    return json(await describeEnsemble(teamId, ensembleId), {
      status: added ? 201 : 200,
      location: `/api/v1/ensembles/${ensembleId}`,
    });
  },
});
export const loader = action;
