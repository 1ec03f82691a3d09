import type { MiddlewareFunction } from "react-router";
import { requestIdContext } from "../context.ts";
import { env, isLoopback } from "../env.server.ts";
import { forbidden } from "../services/http.server.ts";
import { log } from "../services/log.server.ts";
import { isApiPath } from "./api-path.server.ts";
import { refuse } from "./refuse.server.ts";

const SAFE = new Set(["GET", "HEAD", "OPTIONS"]);

/**
 * True where a page of this application sent the request. On loopback all three ways to write the machine's own
 * address count, with the same port.
 */
export function isOwnOrigin(origin: string | null, own: string): boolean {
  if (origin === null || origin === "null" || !URL.canParse(origin)) return false;
  if (origin === own) return true;
  if (!isLoopback(own) || !isLoopback(origin)) return false;
  const [from, to] = [new URL(origin), new URL(own)];
  return from.port === to.port && from.protocol === to.protocol && from.origin === origin;
}

/**
 * Refuses every unsafe request that no page of ours sent, whatever route it goes to. Calls of the API come by token
 * only; whether that is good is decided after this.
 */
export const sameOriginMiddleware: MiddlewareFunction<Response> = async ({ request, url, context }, next) => {
  if (SAFE.has(request.method) || isApiPath(url.pathname)) return next();
  const origin = request.headers.get("origin");
  if (isOwnOrigin(origin, env().APP_ORIGIN)) return next();
  log.warn({ requestId: context.get(requestIdContext), origin: origin?.slice(0, 200) }, "foreign origin");
  const found = origin === null ? "named no page" : `came from ${origin.slice(0, 100)}`;
  return refuse(
    url,
    forbidden(
      `This request ${found}; only pages of ${env().APP_ORIGIN} may send it. Open the page there and try again.`,
    ),
    context.get(requestIdContext),
  );
};
