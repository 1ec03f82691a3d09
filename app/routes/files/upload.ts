import { answerCall, json } from "~/routes/api/answer-call.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { framesRead, withFramesRead } from "~/services/ensembles/frames-read.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { takeIn } from "~/services/ensembles/take-in.server";
import { notFound } from "~/services/http.server";

/**
 * Files from the browser, into the team named by the field `team`: what is open becomes a question. GET tells whoever
 * sends files, here or as a batch, how many frames of the upload `key` were read so far: null before its first and after
 * its last.
 */
export const action = answerCall({
  async GET({ actor, url }) {
    if (actor.kind !== "user") throw notFound();
    return json({ frames: framesRead(actor, url.searchParams.get("key")) });
  },
  async POST({ actor, request }) {
    if (actor.kind !== "user") throw notFound();
    const form = openForm({ body: request.body, contentType: request.headers.get("content-type") });
    const { ensembleId, teamId, created } = await withFramesRead(actor, request, (told) =>
      takeIn({ actor, form, told }),
    );
    return json(await describeEnsemble(teamId, ensembleId), { status: created ? 201 : 200 });
  },
});
export const loader = action;
