import { createCookie } from "react-router";
import { env } from "../env.server.ts";

const MINUTES = 10;

function cookie() {
  const { secure, PORT, SESSION_SECRET } = env();
  return createCookie(`typed-address-${PORT}`, {
    httpOnly: true,
    secure,
    sameSite: "lax",
    // Pages fetched by the router end in ".data": below "/login" alone they would come without it.
    path: "/",
    maxAge: MINUTES * 60,
    secrets: SESSION_SECRET ?? [],
  });
}

/**
 * Keeps an address that was typed a moment ago for the sign-in form, so that nobody types it twice. It stands in a
 * cookie of the person's own browser, not in the address, which logs and histories keep.
 */
export function writeTypedAddress(email: string): Promise<string> {
  return cookie().serialize(email.slice(0, 254));
}

/** The address that was typed, or nothing. */
export async function readTypedAddress(header: string | null): Promise<string | undefined> {
  const value: unknown = await cookie().parse(header);
  return typeof value === "string" && value !== "" ? value : undefined;
}
