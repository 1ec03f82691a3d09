import { averagesQuerySchema } from "~/lib/api/schemas";
import { attachment } from "~/services/attachment";
import { accessSift } from "~/services/auth/access.server";
import { exportAverages } from "~/services/averages/averages-csv.server";
import { answerCall, readQuery } from "./answer-call.server";

export const loader = answerCall({
  async GET({ actor, url, params }) {
    const { siftId } = await accessSift(actor, "read", params.id ?? "");
    const file = await exportAverages({ actor, siftId, ...readQuery(url, averagesQuerySchema) });
    return new Response(file.text, {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": attachment(file.name),
      },
    });
  },
});
export const action = loader;
