import { apiTokenMiddleware } from "~/middleware/api-token.server";
import type { Route } from "./+types/layout";

export const middleware: Route.MiddlewareFunction[] = [apiTokenMiddleware];

/** Nothing stands at `/api/v1` itself. */
export { action, loader } from "./not-found";
