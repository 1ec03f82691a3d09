import { accessEnsemble } from "~/services/auth/access.server";
import { addColumns } from "~/services/columns/add-columns.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { answerCall, json } from "./answer-call.server";

/** Further energies and properties, from a table or a second structure file. */
export const action = answerCall({
  async POST({ actor, request, params }) {
    const { ensembleId } = await accessEnsemble(actor, "take-in", params.id ?? "");
    const form = openForm({ body: request.body, contentType: request.headers.get("content-type") });
    const added = await addColumns({ actor, ensembleId, form });
    if (added.kind === "preview") return json(added.preview);
    return json({ columns: added.columns, messages: added.messages }, { status: 201 });
  },
});
export const loader = action;
