import { populationsQuerySchema } from "~/lib/api/schemas";
import { readOutsideChoice } from "~/lib/outside/choice";
import { answerCall, readQuery } from "~/routes/api/answer-call.server";
import { attachment } from "~/services/attachment";
import { accessSift } from "~/services/auth/access.server";
import { exportOutside } from "~/services/outside/outside-csv.server";

const querySchema = populationsQuerySchema.pick({ temperature: true, weights: true });

/** Conformers as they lie to structures from outside, as CSV; the query is that of the page. */
export const loader = answerCall({
  async GET({ actor, url, params }) {
    const { siftId } = await accessSift(actor, "read", params.id ?? "");
    const { temperature, weights } = readQuery(url, querySchema);
    const choice = readOutsideChoice(url.searchParams);
    const file = await exportOutside({ actor, siftId, choice, temperature, weights });
    return new Response(file.text, {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": attachment(file.name),
      },
    });
  },
});
export const action = loader;
