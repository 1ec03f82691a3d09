import { expect, it } from "vitest";
import { whyNotReleased } from "./release.ts";

// product.md, decisions: what waits for an answer, has a far-off energy or a person's hold can be released;
// another species or configuration, and broken frames, cannot.
it.each(["waits-for-answer", "far-off", "by-hand"])("%s may be released", (reason) => {
  expect(whyNotReleased(reason)).toBeNull();
});

it.each([
  "unreadable",
  "other-composition",
  "other-order",
  "other-species",
  "other-configuration",
  "unclear",
  "constructor",
  null,
])("%s stays held, with a way out", (reason) => {
  expect(whyNotReleased(reason)).toMatch(/^(it|its|the) .+\. .+\.$/);
  expect(whyNotReleased(reason, 2)).toMatch(/^(they|their|the) .+\. .+\.$/);
});
