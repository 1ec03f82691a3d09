import { href } from "react-router";
import { EditionReport } from "~/components/edition/edition-report";
import { EditionShell } from "~/components/edition/edition-shell";
import { TextLink } from "~/components/ui/text-link";
import { actorContext, requestIdContext } from "~/context";
import { editionNumber } from "~/routes/share/share-call.server";
import { loadEdition } from "~/services/editions/load-edition.server";
import { forPage } from "~/services/http.server";
import type { Route } from "./+types/edition";

export function meta({ loaderData }: Route.MetaArgs) {
  const edition = loaderData?.edition;
  return [{ title: edition ? `${edition.ensemble.name}, edition ${edition.number} · Lowlying` : "Lowlying" }];
}

export async function loader({ params, context }: Route.LoaderArgs) {
  const edition = await forPage(context.get(requestIdContext), () =>
    loadEdition({
      actor: context.get(actorContext),
      ensembleId: params.id,
      number: editionNumber(params.number),
    }),
  );
  return { edition };
}

/** What a guest sees, for members: the same page under its own address. */
export default function MembersEdition({ loaderData, params }: Route.ComponentProps) {
  const { edition } = loaderData;
  const { id, number } = params;
  const addresses = {
    file: (name: string) => href("/files/ensembles/:id/editions/:number/files/:name", { id, number, name }),
    source: (position: number) =>
      href("/files/ensembles/:id/sources/:position", { id, position: String(position) }),
    positions: href("/files/ensembles/:id/editions/:number/positions", { id, number }),
  };
  return (
    <EditionShell
      edition={edition}
      addresses={addresses}
      note="as a guest sees it"
      back={<TextLink to={href("/ensembles/:id/hand-over", { id })}>Back to Hand-over</TextLink>}
      foot={`Edition ${edition.number} of ${edition.team}.`}
    >
      <EditionReport edition={edition} addresses={addresses} />
    </EditionShell>
  );
}
