import { randomBytes } from "node:crypto";
import type { MiddlewareFunction } from "react-router";
import { actorContext, addressContext, nonceContext, requestIdContext } from "../context.ts";
import { env } from "../env.server.ts";
import type { Actor } from "../services/auth/access.server.ts";
import { log, loggablePath } from "../services/log.server.ts";
import { securityHeaders } from "./security-headers.server.ts";

function loggableActor(actor: Actor): Record<string, string> {
  if (actor.kind === "anonymous") return { actor: "anonymous" };
  const known = { actor: actor.kind, userId: actor.userId };
  return actor.kind === "token" ? { ...known, tokenId: actor.tokenId } : known;
}

/** Only `npm run dev`: built code holds no trace of it, tests check what production sends. */
const isDevelopment = () => import.meta.env?.DEV === true && env().NODE_ENV === "development";

/**
 * First of the root middleware: names the request, writes its line in the log, and puts the security headers on
 * whatever comes back, refusals and failures included.
 */
export const requestMiddleware: MiddlewareFunction<Response> = async ({ request, url, context }, next) => {
  const started = performance.now();
  if (context.get(requestIdContext) === "") {
    context.set(requestIdContext, randomBytes(8).toString("hex"));
  }
  const requestId = context.get(requestIdContext);
  const nonce = randomBytes(16).toString("base64url");
  context.set(nonceContext, nonce);

  const response = await next();

  const policy = { nonce, secure: env().secure, development: isDevelopment() };
  for (const [name, value] of Object.entries(securityHeaders(policy))) response.headers.set(name, value);
  response.headers.set("x-request-id", requestId);
  // What is shown depends on who asks, down to the error pages: nothing of it is kept on the way.
  if (!response.headers.has("cache-control")) response.headers.set("cache-control", "no-store");
  // Links are for those who were given them.
  if (/^\/+e\//i.test(url.pathname)) response.headers.set("x-robots-tag", "noindex");
  if (response.status === 503 && !response.headers.has("retry-after"))
    response.headers.set("retry-after", "5");

  log[response.status >= 500 ? "error" : "info"](
    {
      requestId,
      method: request.method,
      path: loggablePath(url.pathname),
      status: response.status,
      ms: Math.round(performance.now() - started),
      address: context.get(addressContext),
      ...loggableActor(context.get(actorContext)),
    },
    "request",
  );
  return response;
};
