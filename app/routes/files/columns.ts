import { answerCall, json } from "~/routes/api/answer-call.server";
import { accessEnsemble } from "~/services/auth/access.server";
import { addColumns } from "~/services/columns/add-columns.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { notFound } from "~/services/http.server";

/** A table or a second structure file from the page: first as a preview, then to be kept. */
export const action = answerCall({
  async POST({ actor, request, params }) {
    if (actor.kind !== "user") throw notFound();
    const { ensembleId } = await accessEnsemble(actor, "take-in", params.id ?? "");
    const form = openForm({ body: request.body, contentType: request.headers.get("content-type") });
    const added = await addColumns({ actor, ensembleId, form });
    if (added.kind === "preview") return json(added.preview);
    return json({ columns: added.columns, messages: added.messages }, { status: 201 });
  },
});
export const loader = action;
