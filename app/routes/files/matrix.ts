import { siftQuerySchema } from "~/lib/api/schemas";
import { answerCall, json, readQuery } from "~/routes/api/answer-call.server";
import { accessMatrix, cancelMatrix, getMatrix } from "~/services/matrices/find-matrix.server";

/** State of a pair matrix; DELETE cancels it. */
export const loader = answerCall({
  async GET({ actor, url, params, request }) {
    const { id } = await accessMatrix(actor, "read", params.id ?? "");
    const { wait } = readQuery(url, siftQuerySchema);
    return json(await getMatrix({ actor, matrixId: id, waitSeconds: wait ?? 0, signal: request.signal }));
  },
  async DELETE({ actor, params }) {
    return json(await cancelMatrix({ actor, matrixId: params.id ?? "" }), { status: 202 });
  },
});
export const action = loader;
