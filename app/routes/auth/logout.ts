import { href, redirect } from "react-router";
import { actorContext, addressContext, cookieChangeContext, requestIdContext } from "~/context";
import { signOut } from "~/services/auth/sign-out.server";
import { forPage, notFound, pageError } from "~/services/http.server";
import type { Route } from "./+types/logout";

export async function action({ context }: Route.ActionArgs) {
  await forPage(context.get(requestIdContext), () =>
    signOut(context.get(actorContext), context.get(addressContext)),
  );
  context.get(cookieChangeContext).change = { secret: null, stay: false };
  return redirect(href("/"), {
    status: 303,
    headers: {
      // What pages kept in the browser goes with the session; a page in memory must not stay on the screen.
      "clear-site-data": '"storage"',
      "x-remix-reload-document": "true",
    },
  });
}

/** Nothing is signed out by following a link. */
export function loader({ context }: Route.LoaderArgs) {
  throw pageError(notFound(), context.get(requestIdContext));
}
