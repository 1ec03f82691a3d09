import { createContext } from "react-router";
import type { Actor } from "./services/auth/access.server.ts";

/** Who calls. Set by the session or token middleware; anonymous until then. */
export const actorContext = createContext<Actor>({ kind: "anonymous" });

/** Names the request in the log, in problem documents and on the page for failures. */
export const requestIdContext = createContext<string>("");

/** One nonce a response: header, document and stream renderer share it. */
export const nonceContext = createContext<string>("");

/** Address of the caller as TRUST_PROXY gives it, never from a header that anybody can write. */
export const addressContext = createContext<string>("unknown");

/** What the session middleware writes into the cookie once the answer is made; only it sets cookies of sessions. */
export interface CookieChange {
  /** Secret of a new session, or null where the cookie ends. */
  secret: string | null;
  stay: boolean;
}
export const cookieChangeContext = createContext<{ change: CookieChange | null }>();
