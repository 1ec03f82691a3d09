import { href, redirect } from "react-router";
import { parseTheme, writeThemeCookie } from "~/lib/theme";
import type { Route } from "./+types/theme";

/** Keeps the choice of day or night chart and goes back to the page it was made on. */
export async function action({ request }: Route.ActionArgs) {
  const form = await request.formData();
  const back = String(form.get("back") ?? "");
  // One slash and no backslash: an address of ours, never another host.
  const to = /^\/(?![/\\])[^\\]*$/.test(back) ? back : href("/");
  return redirect(to, { headers: { "Set-Cookie": writeThemeCookie(parseTheme(form.get("theme"))) } });
}

export function loader() {
  return redirect(href("/"));
}
