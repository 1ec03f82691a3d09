import { describe, expect, it } from "vitest";
import { bodyLimit, clientAddress } from "./application.server.ts";

describe("clientAddress (security G07)", () => {
  it("believes no header unless a proxy of ours stands in front", () => {
    expect(clientAddress("198.51.100.9", "6.6.6.6", 0)).toBe("198.51.100.9");
  });

  it("takes the entry that our proxy wrote, not what the caller wrote before it", () => {
    expect(clientAddress("127.0.0.1", "6.6.6.6, 192.0.2.7", 1)).toBe("192.0.2.7");
    expect(clientAddress("127.0.0.1", "6.6.6.6, 192.0.2.7, 10.0.0.1", 2)).toBe("192.0.2.7");
    expect(clientAddress("127.0.0.1", "192.0.2.7", 3)).toBe("192.0.2.7");
  });

  it("falls back to the peer where the entry is no address", () => {
    expect(clientAddress("127.0.0.1", "<script>", 1)).toBe("127.0.0.1");
    expect(clientAddress("127.0.0.1", "", 1)).toBe("127.0.0.1");
    expect(clientAddress("127.0.0.1", undefined, 1)).toBe("127.0.0.1");
  });
});

describe("bodyLimit", () => {
  it.each([
    "/files/upload",
    "/api/v1/ensembles",
    "/api/v1/ensembles/abc/files",
    "/api/v1/ensembles/abc/columns",
    "/files/ensembles/abc/files",
    "/files/ensembles/abc/columns",
  ])("leaves the counting to the reader of %s", (pathname) => expect(bodyLimit(pathname)).toBeNull());

  it.each(["/ensembles/abc/compare", "/ensembles/abc/compare.data"])(
    "has room for one structure at %s",
    (pathname) => expect(bodyLimit(pathname)).toBe(9_437_184),
  );

  it.each([
    "/login",
    "/",
    "/api/v1/ensembles/abc/sifts",
    "/api/v1/ensembles/abc/answers",
    "/files/ensembles/abc/sifts",
    "/ensembles/abc/columns",
    "/files/uploads",
    "/x/files/upload",
  ])("keeps %s small", (pathname) => expect(bodyLimit(pathname)).toBe(1_048_576));
});
