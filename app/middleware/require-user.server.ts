import { type MiddlewareFunction, redirect } from "react-router";
import { actorContext } from "../context.ts";

/** Address of the sign-in page that leads back to where somebody wanted to go. */
export function signInPath(url: URL): string {
  return `/login?to=${encodeURIComponent(url.pathname + url.search)}`;
}

/**
 * Sends whoever is not signed in to the sign-in page. A first door only: services decide again, on every call. The
 * guarded layout needs a loader, or the router does not ask the server on navigation.
 */
export const requireUserMiddleware: MiddlewareFunction<Response> = async ({ url, context }, next) => {
  if (context.get(actorContext).kind === "anonymous") throw redirect(signInPath(url));
  return next();
};
