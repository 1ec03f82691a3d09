import { answerCall } from "~/routes/api/answer-call.server";
import { loadAccepted } from "~/services/ensembles/load-accepted.server";

/** Accepted frames with the energies of `level`, as `lib/accepted-data.ts` packs them; the same tag is not sent twice. */
export const loader = answerCall({
  async GET({ actor, request, url, params }) {
    const levelId = url.searchParams.get("level");
    const accepted = await loadAccepted({ actor, ensembleId: params.id ?? "", levelId });
    const headers = { etag: `"${accepted.tag}"`, "cache-control": "private, no-cache" };
    if (request.headers.get("if-none-match") === headers.etag)
      return new Response(null, { status: 304, headers });
    return new Response(await accepted.load(), {
      headers: { ...headers, "content-type": "application/octet-stream" },
    });
  },
});
export const action = loader;
