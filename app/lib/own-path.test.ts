import { describe, expect, it } from "vitest";
import { ownPath } from "./own-path.ts";

describe("ownPath", () => {
  it.each([
    ["/", "/"],
    ["/teams/abc?sort=name#top", "/teams/abc?sort=name#top"],
    ["/ensembles/abc/populations?T=298.15&sel=1,2", "/ensembles/abc/populations?T=298.15&sel=1,2"],
    ["/a/../b", "/b"],
  ])("keeps %s", (target, kept) => {
    expect(ownPath(target, "/fallback")).toBe(kept);
  });

  it.each([
    "//evil.example",
    "/\\evil.example",
    "\\/evil.example",
    "/%2fevil.example",
    "/%2F/evil.example",
    "/%5Cevil.example",
    "/\t/evil.example",
    "/\n/evil.example",
    " //evil.example",
    "https://evil.example",
    "javascript:alert(1)",
    "evil.example",
    "/x/..//evil.example",
    "/.//evil.example",
    "",
    null,
    undefined,
    7,
    `/${"a".repeat(3000)}`,
  ])("refuses %j (B07)", (target) => {
    expect(ownPath(target, "/fallback")).toBe("/fallback");
  });
});
