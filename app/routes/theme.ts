import { redirect } from "react-router";
import { requestIdContext } from "~/context";
import { env } from "~/env.server";
import { ownPath } from "~/lib/own-path";
import { parseTheme, writeThemeCookie } from "~/lib/theme";
import { readForm } from "~/routes/read-form.server";
import { forPage, notFound, pageError } from "~/services/http.server";
import type { Route } from "./+types/theme";

/** Form fields: `theme` (light, dark, or empty for the system's), and `back`, the page to return to. */
export async function action({ request, context }: Route.ActionArgs) {
  const form = await forPage(context.get(requestIdContext), () => readForm(request));
  const cookie = writeThemeCookie(parseTheme(form.get("theme")));
  return redirect(ownPath(form.get("back"), "/"), {
    status: 303,
    headers: { "set-cookie": env().secure ? `${cookie}; Secure` : cookie },
  });
}

export function loader({ context }: Route.LoaderArgs) {
  throw pageError(notFound(), context.get(requestIdContext));
}
