import { exportQuerySchema } from "~/lib/api/schemas";
import { attachment } from "~/services/attachment";
import { accessSift } from "~/services/auth/access.server";
import type { ExportFormat, exportSift } from "~/services/sifts/export-sift.server";
import { answerCall, readQuery } from "./answer-call.server";

const CHUNK_CHARACTERS = 65_536;

/** Chunks after which a download asks again whether its taker still may. */
const CHUNKS_A_LOOK = 16;

/** Text in pieces, made as it is taken; many short pieces go out together. */
function streamOf(pieces: Iterable<string>, still: () => Promise<unknown>): ReadableStream<Uint8Array> {
  const iterator = pieces[Symbol.iterator]();
  const encoder = new TextEncoder();
  let chunks = 0;
  return new ReadableStream({
    async pull(controller) {
      if (++chunks % CHUNKS_A_LOOK === 0) await still();
      let text = "";
      let next = iterator.next();
      while (!next.done) {
        text += next.value;
        if (text.length >= CHUNK_CHARACTERS) break;
        next = iterator.next();
      }
      if (text !== "") controller.enqueue(encoder.encode(text));
      if (next.done) controller.close();
    },
  });
}

/** The exports differ in their format only. */
export function exportCall(make: typeof exportSift, format: ExportFormat) {
  return answerCall({
    async GET({ actor, url, params }) {
      const { siftId } = await accessSift(actor, "read", params.id ?? "");
      const { temperature } = readQuery(url, exportQuerySchema);
      const file = await make({ actor, siftId, format, temperature });
      return new Response(
        streamOf(file.pieces, () => accessSift(actor, "read", siftId)),
        {
          headers: {
            "content-type": file.type,
            "content-disposition": attachment(file.name),
            // A CSV has no place for it of its own.
            ...(file.notCurrent === null ? {} : { "x-not-current": file.notCurrent }),
          },
        },
      );
    },
  });
}
