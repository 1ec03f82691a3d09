import type { HomeData } from "~/components/home/home-page";
import { HomePage } from "~/components/home/home-page";
import { AppShell } from "~/components/layout/app-shell";
import { actorContext, requestIdContext } from "~/context";
import { env } from "~/env.server";
import { loadExample } from "~/services/ensembles/load-example.server";
import { forPage } from "~/services/http.server";
import type { Route } from "./+types/home";

export const meta: Route.MetaFunction = () => [
  { title: "Lowlying: which conformers matter" },
  {
    name: "description",
    content:
      "A workbench for conformer ensembles: every frame accounted for, duplicates explained, populations that say where they come from.",
  },
];

export async function loader({ context }: Route.LoaderArgs): Promise<HomeData> {
  const actor = context.get(actorContext);
  const found = await forPage(context.get(requestIdContext), () => loadExample({ actor }));
  const { ensemble, sift } = found ?? {};
  return {
    // Of the sift only what is kept: the page shows no repeats.
    example: ensemble && sift?.result ? { ensemble, recipe: sift.recipe, kept: sift.result.kept } : null,
    signedIn: actor.kind === "user",
    openSignUp: env().OPEN_SIGN_UP,
  };
}

export default function Page({ loaderData }: Route.ComponentProps) {
  return (
    <AppShell results={loaderData.example !== null}>
      <HomePage data={loaderData} />
    </AppShell>
  );
}
