import { describe, expect, it } from "vitest";
import { EnvError, isLoopback, readEnv } from "./env.server.ts";

const DATABASE_URL = "mysql://u:p@127.0.0.1/lowlying";
const PUBLIC = { DATABASE_URL, NODE_ENV: "production", APP_ORIGIN: "https://lowlying.lab.example" };
const SECRET = "0123456789abcdef0123456789abcdef";

const refusal = (source: Record<string, string>) => {
  try {
    readEnv(source);
  } catch (error) {
    return error instanceof EnvError ? error.message : String(error);
  }
  return "";
};

describe("the environment", () => {
  it("needs nothing but a database on loopback", () => {
    const env = readEnv({ DATABASE_URL });
    expect(env).toMatchObject({
      PORT: 3000,
      HOST: "127.0.0.1",
      APP_ORIGIN: "http://127.0.0.1:3000",
      OPEN_SIGN_UP: false,
      MAX_FILE_BYTES: 536_870_912,
      MAX_FRAMES: 50_000,
      MAX_ATOMS: 1_000,
      TEAM_QUOTA_BYTES: 20_000_000_000,
      API_CALLS_PER_MINUTE: 1_200,
      API_UPLOADS_PER_MINUTE: 240,
      TRUST_PROXY: 0,
      ARGON2_MEMORY_KIB: 19_456,
      public: false,
      secure: false,
    });
  });

  it("takes the port into the address that it is reached by", () => {
    expect(readEnv({ DATABASE_URL, PORT: "4123" }).APP_ORIGIN).toBe("http://127.0.0.1:4123");
  });

  it("treats blank settings as absent", () => {
    expect(readEnv({ DATABASE_URL, PORT: "", SMTP_URL: "", SESSION_SECRET: "", APP_ORIGIN: "" }).PORT).toBe(
      3000,
    );
  });

  it("names every bad setting at once and tells no value (security G05)", () => {
    const said = refusal({
      PORT: "99999",
      DATABASE_URL: "postgres://u:hunter2@db/x",
      OPEN_SIGN_UP: "perhaps",
      SESSION_SECRET: "tooshort",
      MAX_FRAMES: "many",
      APP_ORIGIN: "lowlying.example",
    });
    for (const key of [
      "PORT",
      "DATABASE_URL",
      "OPEN_SIGN_UP",
      "SESSION_SECRET",
      "MAX_FRAMES",
      "APP_ORIGIN",
    ]) {
      expect(said).toMatch(new RegExp(`^  ${key} `, "m"));
    }
    expect(said).not.toContain("hunter2");
    expect(said).not.toContain("tooshort");
  });

  it("says that the database is missing", () => {
    expect(refusal({})).toContain("DATABASE_URL");
  });

  it("stops in production without a secret, and says how to mend it (security G05)", () => {
    expect(refusal(PUBLIC)).toMatch(/SESSION_SECRET is missing; .*32 random characters/);
    expect(readEnv({ ...PUBLIC, SESSION_SECRET: SECRET })).toMatchObject({ public: true, secure: true });
  });

  it("accepts no weaker password hashes and no unsafe database in production (A01, F01)", () => {
    const said = refusal({
      ...PUBLIC,
      SESSION_SECRET: SECRET,
      ARGON2_MEMORY_KIB: "1024",
      DATABASE_DURABILITY: "relaxed",
    });
    expect(said).toContain("ARGON2_MEMORY_KIB");
    expect(said).toContain("DATABASE_DURABILITY");
  });

  it("is not production for strangers on loopback, whatever NODE_ENV says", () => {
    const env = readEnv({ DATABASE_URL, NODE_ENV: "production", APP_ORIGIN: "http://localhost:3000" });
    expect(env.public).toBe(false);
  });

  it("holds two keys at once for rotation (security G05)", () => {
    const rotated = readEnv({ DATABASE_URL, SESSION_SECRET: `${SECRET}, x${SECRET}` });
    expect(rotated.SESSION_SECRET).toEqual([SECRET, `x${SECRET}`]);
    expect(refusal({ DATABASE_URL, SESSION_SECRET: `${SECRET},short` })).toContain("SESSION_SECRET");
  });

  it.each([
    ["http://127.0.0.1:3000", true],
    ["http://127.8.9.1", true],
    ["http://localhost:80", true],
    ["http://[::1]:3000", true],
    ["https://lowlying.lab.example", false],
    ["http://127.0.0.1.evil.example", false],
    ["http://localhost.evil.example", false],
    ["no address", false],
  ])("knows whether %s leaves the machine", (origin, loopback) => {
    expect(isLoopback(origin)).toBe(loopback);
  });
});
