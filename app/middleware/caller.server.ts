import type { RouterContextProvider } from "react-router";
import { addressContext } from "../context.ts";
import type { Caller } from "../services/auth/sign-in.server.ts";

/** From where a form comes: what throttles and the logbook note. */
export function callerOf(request: Request, context: Readonly<RouterContextProvider>): Caller {
  return { address: context.get(addressContext), userAgent: request.headers.get("user-agent") };
}
