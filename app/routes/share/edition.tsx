import { data, href } from "react-router";
import { EditionReport } from "~/components/edition/edition-report";
import { EditionShell } from "~/components/edition/edition-shell";
import { EndedLink } from "~/components/edition/ended-link";
import { SharedLogbook } from "~/components/edition/shared-logbook";
import { addressContext, requestIdContext } from "~/context";
import { formatDateTime } from "~/lib/format";
import { forPage } from "~/services/http.server";
import { loadShared } from "~/services/links/load-shared.server";
import type { Route } from "./+types/edition";

export function meta({ loaderData }: Route.MetaArgs) {
  const title =
    loaderData?.live === true
      ? `${loaderData.edition.ensemble.name}, edition ${loaderData.edition.number} · Lowlying`
      : "A link of Lowlying";
  return [{ title }, { name: "robots", content: "noindex" }];
}

/** The one page that a guest sees. A person who opens it counts; a browser that looks ahead does not. */
export async function loader({ request, params, context }: Route.LoaderArgs) {
  const ahead = /prefetch|prerender/i.test(request.headers.get("sec-purpose") ?? "");
  const page = await forPage(context.get(requestIdContext), () =>
    loadShared({
      secret: params.token,
      address: context.get(addressContext),
      count: request.method === "GET" && !ahead,
    }),
  );
  return data(page, { status: page.live ? 200 : 404, headers: { "cache-control": "no-store" } });
}

/** The edition never changes. */
export function shouldRevalidate() {
  return false;
}

export default function SharedEdition({ loaderData, params }: Route.ComponentProps) {
  if (!loaderData.live) return <EndedLink endedAt={loaderData.endedAt} contact={loaderData.contact} />;
  const { edition, endsAt, entries } = loaderData;
  const { token } = params;
  const addresses = {
    file: (name: string) => href("/e/:token/files/:name", { token, name }),
    source: (position: number) => href("/e/:token/sources/:position", { token, position: String(position) }),
    positions: href("/e/:token/positions", { token }),
  };
  return (
    <EditionShell
      edition={edition}
      addresses={addresses}
      note={`this link ends ${formatDateTime(endsAt)}`}
      foot={`This link shows edition ${edition.number} only and ends ${formatDateTime(endsAt)}.`}
    >
      <EditionReport edition={edition} addresses={addresses}>
        {entries ? <SharedLogbook entries={entries} /> : null}
      </EditionReport>
    </EditionShell>
  );
}
