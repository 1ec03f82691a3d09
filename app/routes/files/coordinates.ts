import { z } from "zod";
import { answerCall, readQuery } from "~/routes/api/answer-call.server";
import { accessEnsemble } from "~/services/auth/access.server";
import { loadCoordinates } from "~/services/ensembles/load-coordinates.server";

const PART = /^([1-9]\d{0,6})(?:-([1-9]\d{0,6}))?$/;
const WORDS = "Frame numbers from 1 with commas between them, ranges too, such as 1,5,9-12.";

const querySchema = z.object({
  frames: z.string().transform((text, context) => {
    const frames: number[] = [];
    for (const part of text.split(",")) {
      const match = PART.exec(part);
      const first = Number(match?.[1]);
      const last = Number(match?.[2] ?? match?.[1]);
      if (!match || last < first || frames.length + last - first >= 1_000_000) {
        context.addIssue({ code: "custom", message: WORDS });
        return z.NEVER;
      }
      for (let frame = first; frame <= last; frame++) frames.push(frame);
    }
    return frames;
  }),
});

/** Little-endian doubles, frames in the order asked: [frame][atom][x, y, z] in Å. */
export const loader = answerCall({
  async GET({ actor, url, params }) {
    const { ensembleId } = await accessEnsemble(actor, "read", params.id ?? "");
    const { frames } = readQuery(url, querySchema);
    const positions = await loadCoordinates({ actor, ensembleId, frames });
    return new Response(positions.buffer as ArrayBuffer, {
      headers: { "content-type": "application/octet-stream" },
    });
  },
});
export const action = loader;
