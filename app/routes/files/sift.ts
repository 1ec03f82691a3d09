import { siftQuerySchema } from "~/lib/api/schemas";
import { answerCall, json, readQuery } from "~/routes/api/answer-call.server";
import { accessSift } from "~/services/auth/access.server";
import { cancelSift } from "~/services/sifts/cancel-sift.server";
import { getSift } from "~/services/sifts/get-sift.server";

/** State of a sift for whoever follows it on a page, which reads the result with its section; DELETE cancels it. */
export const loader = answerCall({
  async GET({ actor, url, params, request }) {
    const { siftId } = await accessSift(actor, "read", params.id ?? "");
    const { wait } = readQuery(url, siftQuerySchema);
    const { result: _, ...state } = await getSift({
      actor,
      siftId,
      waitSeconds: wait,
      stateOnly: true,
      signal: request.signal,
    });
    return json(state);
  },
  async DELETE({ actor, params }) {
    return json(await cancelSift({ actor, siftId: params.id ?? "" }), { status: 202 });
  },
});
export const action = loader;
