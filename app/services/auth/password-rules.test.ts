import { describe, expect, it } from "vitest";
import { passwordFault } from "./password-rules.server.ts";

const EMAIL = "marguerite.x@lab.example";

describe("passwordFault", () => {
  it.each([
    "seven brown kettles sing",
    "ein Satz mit Umlauten äöü",
    "            x", // blanks count and are kept
    "短い文でもよいですから大丈夫",
    "x7#Kq!pWz0vT",
    "a".repeat(50) + "b".repeat(50),
    "Tq".repeat(5) + "a".repeat(118),
  ])("takes %j (A02)", (password) => {
    expect(passwordFault(password, EMAIL)).toBeNull();
  });

  it.each(["", "short", "elevenchars", "🙂".repeat(11)])("finds %j too short", (password) => {
    expect(passwordFault(password, EMAIL)).toContain("At least 12");
  });

  it("counts characters, not bytes, up to 128 (A02)", () => {
    expect(passwordFault(`q${"ä".repeat(126)}z`, EMAIL)).toBeNull();
    expect(passwordFault(`q${"a".repeat(126)}zz`, EMAIL)).toContain("At most 128");
  });

  it.each([
    "password1234",
    "Password1234",
    "P@ssw0rd1234",
    "passwordpassword",
    "qwertyuiop123",
    "123456789012",
    "1234567890123456",
    "aaaaaaaaaaaa",
    "abcabcabcabc",
    "abcdefghijkl",
    "zyxwvutsrqpo",
    "qwertyuiopas",
    "letmein123456",
    "correct horse battery staple",
    "correcthorsebatterystaple",
    "iloveyou-1234",
    "lowlyinglowlying",
    "lowlying2026",
    "Lowlying-2026!",
  ])("refuses the well-known %j (A02)", (password) => {
    expect(passwordFault(password, EMAIL)).toContain("first passwords");
  });

  // Frequency list of zxcvbn 4.4.2: these 12 of its first 3,000 are long enough; the others fail on their length.
  it.each([
    "123qweasdzxc",
    "1qaz2wsx3edc",
    "q1w2e3r4t5y6",
    "1q2w3e4r5t6y",
    "mailcreated5240",
    "qazwsxedcrfv",
    "123456qwerty",
    "qwerty123456",
    "polniypizdec0211",
    "sojdlg123aljg",
    "leavemealone",
    "123456654321",
  ])("refuses %j of the 3,000 most frequent (A02)", (password) => {
    expect(passwordFault(password, EMAIL)).toContain("first passwords");
  });

  it("refuses the user's own address", () => {
    expect(passwordFault(EMAIL, EMAIL)).toContain("own address");
    expect(passwordFault("MARGUERITE.X@lab.example", EMAIL)).toContain("own address");
  });
});
