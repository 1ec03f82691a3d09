import { describe, expect, it } from "vitest";
import { takeCall } from "./call-rate.server.ts";
import { addressRange } from "./throttle.server.ts";

describe("addressRange", () => {
  it.each([
    ["192.0.2.17", "192.0.2.0/24"],
    ["::ffff:192.0.2.17", "192.0.2.0/24"],
    ["2001:db8:1:2:3:4:5:6", "2001:db8:1::/48"],
    ["2001:0DB8:0001::9", "2001:db8:1::/48"],
    ["2001:db8::1", "2001:db8:0::/48"],
    ["::1", "0:0:0::/48"],
    ["unknown", "unknown"],
  ])("counts %s in %s", (address, range) => {
    expect(addressRange(address)).toBe(range);
  });
});

describe("takeCall", () => {
  it("lets the limit through in a minute and says how long to wait", () => {
    const at = 1_000_000;
    for (let n = 0; n < 5; n++) expect(takeCall("a caller", 5, at + n)).toBeNull();
    expect(takeCall("a caller", 5, at + 10_000)).toBe(50);
    expect(takeCall("another", 5, at + 10_000)).toBeNull();
    expect(takeCall("a caller", 5, at + 60_000)).toBeNull();
  });
});
