import { describe, expect, it } from "vitest";
import { attachment, safeFileName } from "./attachment.ts";

describe("names of downloads", () => {
  it.each([
    ["../../etc/passwd", "passwd"],
    ["C:\\work\\run 3.xyz", "run 3.xyz"],
    ["con.xyz", "_con.xyz"],
    ["", "file"],
    ["...", "file"],
    ['a"b<c>.xyz', "a_b_c_.xyz"],
    ["a\u202egnp.xyz", "a_gnp.xyz"],
    ["a\r\nX: y.csv", "a__X_ y.csv"],
  ])("makes %j safe", (name, expected) => {
    expect(safeFileName(name)).toBe(expected);
  });

  it("cuts a long name before its ending", () => {
    const cut = safeFileName(`${"n".repeat(300)}.xyz.gz`);
    expect(cut).toHaveLength(120);
    expect(cut.endsWith("n.xyz.gz")).toBe(true);
  });

  it("writes a header that holds only ASCII, with the real name beside it (RFC 6266, RFC 8187) (security E04)", () => {
    const header = attachment("Größe (1)'.csv");
    expect(header).toBe(
      "attachment; filename=\"Gr__e (1)'.csv\"; filename*=UTF-8''Gr%C3%B6%C3%9Fe%20%281%29%27.csv",
    );
    expect(/^[\x20-\x7e]+$/.test(header)).toBe(true);
  });
});
