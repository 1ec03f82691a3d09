import { z } from "zod";
import { answerCall, json, readJson } from "~/routes/api/answer-call.server";
import { accessSift } from "~/services/auth/access.server";
import { askForMatrix, matrixOfSift } from "~/services/matrices/ask-for-matrix.server";

const bodySchema = z.strictObject({ frames: z.enum(["kept", "compared"]).default("kept") });

/** GET tells whether the distances of a sift's conformers were asked for; POST asks for them. */
export const loader = answerCall({
  async GET({ actor, params }) {
    const { siftId } = await accessSift(actor, "read", params.id ?? "");
    return json({ matrix: await matrixOfSift({ actor, siftId }) });
  },
  async POST({ actor, request, params }) {
    const { siftId } = await accessSift(actor, "compute", params.id ?? "");
    const { frames } = await readJson(request, bodySchema);
    const matrix = await askForMatrix({ actor, siftId, frames });
    return json(matrix, { status: 202, location: `/files/matrices/${matrix.id}` });
  },
});
export const action = loader;
