import { answerCall } from "~/routes/api/answer-call.server";
import { attachment } from "~/services/attachment";
import { loadSource } from "~/services/ensembles/load-source.server";

function streamOf(chunks: AsyncGenerator<Uint8Array, void, undefined>): ReadableStream<Uint8Array> {
  return new ReadableStream({
    async pull(controller) {
      const next = await chunks.next();
      if (next.done) controller.close();
      else controller.enqueue(next.value);
    },
    async cancel() {
      await chunks.return();
    },
  });
}

export const loader = answerCall({
  async GET({ actor, params }) {
    const position = /^\d{1,6}$/.test(params.position ?? "") ? Number(params.position) : -1;
    const source = await loadSource({ actor, ensembleId: params.id ?? "", position });
    return new Response(streamOf(source.chunks), {
      headers: {
        "content-type": "application/octet-stream",
        "content-length": String(source.bytes),
        "content-disposition": attachment(source.name),
      },
    });
  },
});
export const action = loader;
