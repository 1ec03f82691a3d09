import { href, redirect } from "react-router";
import { actorContext, requestIdContext } from "~/context";
import { requireUserMiddleware } from "~/middleware/require-user.server";
import { forPage } from "~/services/http.server";
import { findPerson } from "~/services/teams/find-person.server";
import type { Route } from "./+types/index";

export const middleware: Route.MiddlewareFunction[] = [requireUserMiddleware];

/** Leads to the team that the person joined first. */
export async function loader({ context }: Route.LoaderArgs) {
  return forPage(context.get(requestIdContext), async () => {
    const person = await findPerson(context.get(actorContext));
    const team = person?.teams[0]?.id;
    // Who belongs to no team reads there what to do.
    if (team === undefined) return redirect(href("/account"));
    return redirect(href("/teams/:team", { team }));
  });
}
