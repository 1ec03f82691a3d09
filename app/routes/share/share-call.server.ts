import type { RouterContextProvider } from "react-router";
import { addressContext, requestIdContext } from "~/context";
import { attachment } from "~/services/attachment";
import type { EditionDownload } from "~/services/editions/open-edition-file.server";
import { forApi } from "~/services/http.server";

interface RouteArgs {
  request: Request;
  params: Record<string, string | undefined>;
  context: Readonly<RouterContextProvider>;
}

/** What a guest brings: the secret of the address, and where they come from. */
export interface SharedCall {
  secret: string;
  address: string;
  /** False for HEAD, which takes nothing out. */
  takes: boolean;
  params: Record<string, string | undefined>;
}

/** A file or data behind a link: whatever opens nothing is 404, ended links included. */
export function sharedCall(answer: (call: SharedCall) => Promise<Response>) {
  return ({ request, params, context }: RouteArgs): Promise<Response> =>
    forApi(context.get(requestIdContext), () =>
      answer({
        secret: params.token ?? "",
        address: context.get(addressContext),
        takes: request.method === "GET",
        params,
      }),
    );
}

function streamOf(chunks: AsyncIterable<Uint8Array>): ReadableStream<Uint8Array> {
  const iterator = chunks[Symbol.asyncIterator]();
  return new ReadableStream({
    async pull(controller) {
      const next = await iterator.next();
      if (next.done) controller.close();
      else controller.enqueue(next.value);
    },
    async cancel() {
      await iterator.return?.();
    },
  });
}

/** A download as an attachment, never shown in place. */
export function sendDownload(file: EditionDownload): Response {
  const headers = new Headers({
    "content-type": file.type,
    "content-disposition": attachment(file.name),
    "cache-control": "no-store",
  });
  if (file.bytes !== null) headers.set("content-length", String(file.bytes));
  return new Response(streamOf(file.chunks), { headers });
}

/** Packed little-endian doubles. */
export function sendDoubles(positions: Float64Array): Response {
  return new Response(positions.slice().buffer, {
    headers: { "content-type": "application/octet-stream", "cache-control": "no-store" },
  });
}

/** The number of an edition in an address; anything else is no edition. */
export function editionNumber(text: string | undefined): number {
  return /^[1-9]\d{0,8}$/.test(text ?? "") ? Number(text) : -1;
}
