import type { MiddlewareFunction } from "react-router";
import { actorContext, addressContext, requestIdContext } from "../context.ts";
import { env } from "../env.server.ts";
import { DomainError } from "../lib/errors.ts";
import { takeCall } from "../services/auth/call-rate.server.ts";
import { findToken } from "../services/auth/find-token.server.ts";
import { fromDomainError, problemResponse, unauthorized } from "../services/http.server.ts";

/** Calls that carry files; they have a rate of their own. */
export function isUpload(method: string, pathname: string): boolean {
  return method === "POST" && /^\/api\/v1\/ensembles(\/[^/]+\/(files|columns))?\/?$/i.test(pathname);
}

function bearer(header: string | null): string | null {
  const match = /^Bearer +(\S+) *$/i.exec(header ?? "");
  return match?.[1] ?? null;
}

function slowDown(seconds: number, rate: string): Response {
  return problemResponse(
    new DomainError("too-many", "Too many calls", `${rate} are allowed. Try again in ${seconds} s.`, {
      extra: { retryAfter: seconds },
    }),
  );
}

function overRate(name: string, limit: number, words: string): Response | null {
  const wait = takeCall(name, limit);
  return wait === null ? null : slowDown(wait, `${limit.toLocaleString("en-US")} ${words}`);
}

/**
 * First door of the API: a valid token, or 401 before anything else is looked at. Cookies count for nothing here; the
 * actor is the token's, whoever else may be signed in in the same browser.
 */
export const apiTokenMiddleware: MiddlewareFunction<Response> = async ({ request, url, context }, next) => {
  context.set(actorContext, { kind: "anonymous" });
  const settings = env();
  const secret = bearer(request.headers.get("authorization"));
  let actor: Awaited<ReturnType<typeof findToken>>;
  try {
    actor = secret === null ? null : await findToken(secret);
  } catch (error) {
    return fromDomainError(error, context.get(requestIdContext));
  }
  if (actor === null) {
    const address = context.get(addressContext);
    const refused = overRate(
      `address:${address}`,
      settings.ANONYMOUS_CALLS_PER_MINUTE,
      "calls a minute without a valid token",
    );
    if (refused) return refused;
    if (request.method === "GET" && url.pathname === "/api/v1/openapi.json") return next();
    return problemResponse(
      unauthorized(
        secret === null
          ? "This call needs a token: send the header Authorization: Bearer followed by it."
          : "This token is unknown, has ended or was revoked, or its user is no longer in the team.",
      ),
    );
  }
  context.set(actorContext, { ...actor, origin: context.get(addressContext) });
  const uploads = settings.API_UPLOADS_PER_MINUTE;
  const refused =
    overRate(`token:${actor.tokenId}`, settings.API_CALLS_PER_MINUTE, "calls a minute a token") ??
    (isUpload(request.method, url.pathname)
      ? overRate(`uploads:${actor.tokenId}`, uploads, "uploads a minute a token")
      : null);
  return refused ?? next();
};
