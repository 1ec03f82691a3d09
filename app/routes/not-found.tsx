import { requestIdContext } from "~/context";
import { notFound, pageError } from "~/services/http.server";
import type { Route } from "./+types/not-found";

export function loader({ context }: Route.LoaderArgs) {
  throw pageError(notFound(), context.get(requestIdContext));
}

export function action({ context }: Route.ActionArgs) {
  throw pageError(notFound(), context.get(requestIdContext));
}

/** Never drawn: the loader throws to the error page. */
export default function Page() {
  return null;
}
