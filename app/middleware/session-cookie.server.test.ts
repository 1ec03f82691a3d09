import { afterEach, describe, expect, it, vi } from "vitest";

const OLD = "an old key of thirty-two characters";
const NEW = "a new key of more than 32 characters";

/** The cookie as a process with these settings makes it. */
async function cookieWith(settings: Record<string, string>) {
  vi.resetModules();
  for (const [key, value] of Object.entries(settings)) vi.stubEnv(key, value);
  return import("./session-cookie.server.ts");
}

afterEach(() => {
  vi.unstubAllEnvs();
  vi.resetModules();
});

describe("the cookie of a session", () => {
  it("is bound to the host and to https where that is used (A06)", async () => {
    const { writeSessionCookie } = await cookieWith({ APP_ORIGIN: "https://lowlying.lab.example" });
    const line = await writeSessionCookie({ secret: "s", stay: false });
    expect(line).toMatch(/^__Host-lowlying=/);
    expect(line.split("; ").slice(1).sort()).toEqual(["HttpOnly", "Path=/", "SameSite=Lax", "Secure"]);
  });

  it("carries the port on plain-http loopback, so that two instances live in one browser", async () => {
    const { writeSessionCookie } = await cookieWith({ APP_ORIGIN: "http://127.0.0.1:4100", PORT: "4100" });
    const line = await writeSessionCookie({ secret: "s", stay: false });
    expect(line).toMatch(/^lowlying-4100=/);
    expect(line).not.toContain("Secure");
  });

  it("is accepted under two keys while they are changed, under one no more (security G05)", async () => {
    const before = await cookieWith({ SESSION_SECRET: OLD });
    const cookie = (await before.writeSessionCookie({ secret: "s", stay: false })).split(";", 1)[0] ?? "";
    const during = await cookieWith({ SESSION_SECRET: `${NEW}, ${OLD}` });
    expect(await during.readSessionCookie(cookie)).toBe("s");
    const renewed = (await during.writeSessionCookie({ secret: "s", stay: false })).split(";", 1)[0] ?? "";
    const after = await cookieWith({ SESSION_SECRET: NEW });
    expect(await after.readSessionCookie(cookie)).toBeNull();
    expect(await after.readSessionCookie(renewed)).toBe("s");
  });

  it("counts for nothing without a signature", async () => {
    const { readSessionCookie, sessionCookie } = await cookieWith({ SESSION_SECRET: NEW });
    const { name } = sessionCookie();
    for (const value of ["s", btoa('"s"'), `${btoa('"s"')}.AAAA`, ""]) {
      expect(await readSessionCookie(`${name}=${encodeURIComponent(value)}`)).toBeNull();
    }
    expect(await readSessionCookie(null)).toBeNull();
  });
});
