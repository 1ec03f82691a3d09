import { href, redirect } from "react-router";
import { actorContext, requestIdContext } from "~/context";
import { requireUserMiddleware } from "~/middleware/require-user.server";
import { forbidden, forPage } from "~/services/http.server";
import { findPerson } from "~/services/teams/find-person.server";
import type { Route } from "./+types/index";

export const middleware: Route.MiddlewareFunction[] = [requireUserMiddleware];

/** Leads to the team that the person joined first. */
export async function loader({ context }: Route.LoaderArgs) {
  return forPage(context.get(requestIdContext), async () => {
    const person = await findPerson(context.get(actorContext));
    const team = person?.teams[0]?.id;
    if (team === undefined)
      throw forbidden("You belong to no team yet. Ask an owner of a team to let you in.");
    return redirect(href("/teams/:team", { team }));
  });
}
