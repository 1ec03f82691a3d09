import { readFilter } from "~/lib/logbook/filter";
import { answerCall } from "~/routes/api/answer-call.server";
import { attachment } from "~/services/attachment";
import { exportLogbook } from "~/services/logbook/load-logbook.server";

export const loader = answerCall({
  async GET({ actor, url, params }) {
    const filter = readFilter(url.searchParams);
    const text = await exportLogbook({ actor, ensembleId: params.id ?? "", filter });
    return new Response(text, {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": attachment("logbook.csv"),
      },
    });
  },
});
export const action = loader;
