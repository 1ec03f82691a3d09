import type { MiddlewareFunction } from "react-router";
import { actorContext, requestIdContext } from "../context.ts";
import { accessEnsemble, accessTeam } from "../services/auth/access.server.ts";
import { forPage } from "../services/http.server.ts";

const READS = new Set(["GET", "HEAD"]);

/**
 * Decides on forms sent to the pages of a team or an ensemble before their fields are looked at: whoever does not see the
 * object gets "not found", whatever the form holds. What the role may do is decided by the service of the act, and reading
 * by the loaders.
 */
export const requireObjectMiddleware: MiddlewareFunction<Response> = async (
  { request, params, context },
  next,
) => {
  if (READS.has(request.method)) return next();
  const actor = context.get(actorContext);
  await forPage<unknown>(context.get(requestIdContext), () =>
    params.team === undefined
      ? accessEnsemble(actor, "read", params.id ?? "")
      : accessTeam(actor, "read", params.team),
  );
  return next();
};
