import { siftQuerySchema } from "~/lib/api/schemas";
import { accessSift } from "~/services/auth/access.server";
import { cancelSift } from "~/services/sifts/cancel-sift.server";
import { getSift } from "~/services/sifts/get-sift.server";
import { answerCall, json, readQuery } from "./answer-call.server";

const answer = answerCall({
  async GET({ actor, url, params, request }) {
    const { siftId } = await accessSift(actor, "read", params.id ?? "");
    const { wait } = readQuery(url, siftQuerySchema);
    const { createdAt: _, ...sift } = await getSift({
      actor,
      siftId,
      waitSeconds: wait,
      signal: request.signal,
    });
    // A role may be lost while a call waits.
    if (wait) await accessSift(actor, "read", siftId);
    return json(sift);
  },
  async DELETE({ actor, params }) {
    return json(await cancelSift({ actor, siftId: params.id ?? "" }), { status: 202 });
  },
});

export const loader = answer;
export const action = answer;
