import { answerCall } from "~/routes/api/answer-call.server";
import { attachment } from "~/services/attachment";
import { exportMatrix } from "~/services/matrices/export-matrix.server";

/** The distances of all pairs as CSV, streamed. */
export const loader = answerCall({
  async GET({ actor, params }) {
    const { lines, count } = await exportMatrix({ actor, matrixId: params.id ?? "" });
    const encoder = new TextEncoder();
    const body = new ReadableStream<Uint8Array>({
      async pull(controller) {
        const next = await lines.next();
        if (next.done) controller.close();
        else controller.enqueue(encoder.encode(next.value));
      },
      async cancel() {
        await lines.return(undefined);
      },
    });
    return new Response(body, {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": attachment(`pair-distances-${count}.csv`),
      },
    });
  },
});
export const action = loader;
