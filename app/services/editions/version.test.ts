import { readFileSync } from "node:fs";
import { expect, it } from "vitest";
import { PRODUCT_VERSION, productVersion } from "./product-version.ts";

it("names the version of package.json", () => {
  const text = readFileSync(new URL("../../../package.json", import.meta.url), "utf8");
  expect(PRODUCT_VERSION).toBe(JSON.parse(text).version);
  expect(productVersion("1.2.3+4")).toBe("1.2.3");
});
