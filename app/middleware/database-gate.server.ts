import type { MiddlewareFunction } from "react-router";
import { requestIdContext } from "../context.ts";
import { databaseAnswers } from "../services/health.server.ts";
import { databaseAway } from "../services/http.server.ts";
import { refuse } from "./refuse.server.ts";

/**
 * Answers at once while the database is away, instead of letting every page wait for its own time-out. Requests of one
 * moment share the look, so that it costs next to nothing.
 */
export const databaseGateMiddleware: MiddlewareFunction<Response> = async ({ url, context }, next) => {
  const health = /^\/+(healthz|readyz)$/i.test(url.pathname);
  if (health || (await databaseAnswers())) return next();
  return refuse(url, databaseAway(), context.get(requestIdContext));
};
