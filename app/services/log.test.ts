import { describe, expect, it } from "vitest";
import { loggableError, loggablePath, makeLog } from "./log.server.ts";

function logged(write: (log: ReturnType<typeof makeLog>) => void): {
  text: string;
  lines: Record<string, unknown>[];
} {
  let text = "";
  const destination = {
    write: (line: string) => {
      text += line;
    },
  };
  write(makeLog({ level: "trace", destination }));
  return {
    text,
    lines: text
      .trimEnd()
      .split("\n")
      .map((line) => JSON.parse(line) as Record<string, unknown>),
  };
}

describe("the log", () => {
  it("writes one JSON object a line, whatever line breaks a value holds (security G02)", () => {
    const { lines } = logged((log) =>
      log.info({ found: 'a\n{"level":"info","msg":"forged"}\r\n\u2028b' }, "one"),
    );
    expect(lines).toHaveLength(1);
    expect(lines[0]).toMatchObject({ level: "info", msg: "one" });
    expect(lines[0]?.time).toMatch(/^\d{4}-.*Z$/);
  });

  it("masks secrets and what people and compounds are called, two levels deep (security G01)", () => {
    const { text } = logged((log) =>
      log.info({
        password: "MARKER",
        headers: { authorization: "Bearer MARKER", cookie: "MARKER" },
        form: { fields: { email: "MARKER", password: "MARKER" } },
        ensemble: { name: "MARKER", label: "MARKER" },
      }),
    );
    expect(text).not.toContain("MARKER");
  });

  it("tells of a database failure without the statement and its values (security G02)", () => {
    const cause = Object.assign(new Error("Duplicate entry 'MARKER' for key"), {
      code: "ER_DUP_ENTRY",
      sql: "insert into users values ('MARKER')",
    });
    const failure = Object.assign(new Error("Failed query: insert MARKER"), {
      query: "insert MARKER",
      cause,
    });
    const { text, lines } = logged((log) => log.error({ err: failure }, "failed"));
    expect(text).not.toContain("MARKER");
    expect(lines[0]).toMatchObject({ err: { cause: { code: "ER_DUP_ENTRY" } } });
  });

  it("tells of other failures by kind, message and place", () => {
    const told = loggableError(new TypeError("broken"));
    expect(told).toMatchObject({ kind: "TypeError", message: "broken" });
    expect((told.stack as string[])[0]).toMatch(/^at /);
  });

  it.each([
    ["/reset-password/aVeryLongSecret", "/reset-password/***"],
    ["/reset-password/aVeryLongSecret.data", "/reset-password/***"],
    ["/e/secret/files/x.csv", "/e/***/files/x.csv"],
    ["/invitation/secret", "/invitation/***"],
    ["//reset-password/secret", "//reset-password/***"],
    ["/RESET-PASSWORD/secret", "/RESET-PASSWORD/***"],
    ["/teams/abc?search=compound", "/teams/abc"],
    ["/ensembles/abc/populations", "/ensembles/abc/populations"],
    ["/reset-password", "/reset-password"],
    ["/%65/secret/positions", "/e/***/positions"],
    ["/E/secret.data", "/E/***"],
    ["/nowhere/abcdefghijklmnopqrstuvwxyz234567", "/nowhere/***"],
    ["/%E0%A4%A", "/%E0%A4%A"],
  ])("shows %s as %s", (path, shown) => {
    expect(loggablePath(path)).toBe(shown);
  });
});
