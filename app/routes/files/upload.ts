import { answerCall, json } from "~/routes/api/answer-call.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { takeIn } from "~/services/ensembles/take-in.server";
import { notFound } from "~/services/http.server";

/** Files from the browser, into the team named by the field `team`: what is open becomes a question. */
export const action = answerCall({
  async POST({ actor, request }) {
    if (actor.kind !== "user") throw notFound();
    const form = openForm({ body: request.body, contentType: request.headers.get("content-type") });
    const { ensembleId, teamId, created } = await takeIn({ actor, form });
    return json(await describeEnsemble(teamId, ensembleId), { status: created ? 201 : 200 });
  },
});
export const loader = action;
