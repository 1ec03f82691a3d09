import { type Cookie, createCookie } from "react-router";
import { env } from "../env.server.ts";
import { SESSION_ABSOLUTE_SECONDS } from "../services/auth/session-times.ts";

let made: Cookie | undefined;

/**
 * The cookie of a session: a random secret, signed. Over https it is bound to this host (`__Host-`) and to secure
 * connections; on plain-http loopback it carries the port, so that two instances do not sign each other out.
 */
export function sessionCookie(): Cookie {
  const { secure, PORT, SESSION_SECRET } = env();
  made ??= createCookie(secure ? "__Host-lowlying" : `lowlying-${PORT}`, {
    httpOnly: true,
    secure,
    sameSite: "lax",
    path: "/",
    secrets: SESSION_SECRET ?? [],
  });
  return made;
}

/** The secret in a request's cookie, or null. A signature that is none of ours counts as no cookie. */
export async function readSessionCookie(header: string | null): Promise<string | null> {
  const value: unknown = await sessionCookie().parse(header);
  return typeof value === "string" && value !== "" ? value : null;
}

/** `Set-Cookie` of a new session, or of its end. Without `stay` the browser forgets it when it closes. */
export function writeSessionCookie(change: { secret: string | null; stay: boolean }): Promise<string> {
  if (change.secret === null) return sessionCookie().serialize("", { maxAge: 0 });
  return sessionCookie().serialize(change.secret, change.stay ? { maxAge: SESSION_ABSOLUTE_SECONDS } : {});
}
