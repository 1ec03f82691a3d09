import { populationsQuerySchema } from "~/lib/api/schemas";
import { accessSift } from "~/services/auth/access.server";
import { loadPopulations } from "~/services/sifts/populations.server";
import { answerCall, json, readQuery } from "./answer-call.server";

export const loader = answerCall({
  async GET({ actor, url, params }) {
    const { siftId } = await accessSift(actor, "read", params.id ?? "");
    return json(await loadPopulations({ actor, siftId, ...readQuery(url, populationsQuerySchema) }));
  },
});
export const action = loader;
