import type { MiddlewareFunction } from "react-router";
import { actorContext, addressContext, cookieChangeContext, requestIdContext } from "../context.ts";
import { type FoundSession, findSession } from "../services/auth/find-session.server.ts";
import { within } from "../services/health.server.ts";
import { asDomainError } from "../services/http.server.ts";
import { isApiPath } from "./api-path.server.ts";
import { refuse } from "./refuse.server.ts";
import { readSessionCookie, writeSessionCookie } from "./session-cookie.server.ts";

async function sessionOf(cookies: string | null): Promise<FoundSession | null> {
  const secret = cookies === null ? null : await readSessionCookie(cookies);
  return secret === null ? null : within(findSession(secret));
}

/**
 * Finds out who calls, from the cookie. It alone writes the cookie: sign-in and sign-out leave their wish in the
 * context, so that loaders that run side by side cannot overwrite each other's. The API reads no cookie at all.
 */
export const sessionMiddleware: MiddlewareFunction<Response> = async ({ request, url, context }, next) => {
  if (isApiPath(url.pathname)) return next();
  const wish: { change: { secret: string | null; stay: boolean } | null } = { change: null };
  context.set(cookieChangeContext, wish);
  let session: FoundSession | null;
  try {
    session = await sessionOf(request.headers.get("cookie"));
  } catch (error) {
    const requestId = context.get(requestIdContext);
    return refuse(url, asDomainError(error, requestId), requestId);
  }
  if (session !== null) {
    context.set(actorContext, { kind: "user", ...session, origin: context.get(addressContext) });
  }

  const response = await next();

  if (wish.change !== null) response.headers.append("set-cookie", await writeSessionCookie(wish.change));
  return response;
};
