import { expect, it } from "vitest";
import { momentsOf } from "./average.ts";
import type { AverageRule } from "./rule.ts";
import { steadyWords } from "./steady.ts";

const words = (rule: AverageRule, values: (number | null)[], paired = false) =>
  steadyWords(
    momentsOf({ rule, values }, { degeneracies: values.map(() => (paired ? 2 : 1)), mirrorMerged: paired }),
    rule === "circular" ? "°" : "Å",
    rule === "circular" ? 0 : 2,
  );

it("says of an angle that stays where it is that it does not vary, also about 180°", () => {
  expect(words("circular", [179, -179, null])).toMatch(
    /^All conformers lie within 2° about 180°: beyond that it does not vary/,
  );
  expect(words("circular", [60.1, 60.2])).toMatch(/^It is 60° in every conformer: it does not vary/);
  expect(words("linear", [1.3301, 1.3302])).toContain("It is 1.33\u00a0Å in every conformer");
});

it("says nothing where it varies: between shapes, between both hands, or in one conformer alone", () => {
  expect(words("circular", [60, 180])).toBeNull();
  expect(words("circular", [60, 61], true)).toBeNull();
  expect(words("circular", [179, 178], true)).toContain("does not vary");
  expect(words("linear", [1.33, 1.35])).toBeNull();
  expect(words("circular", [60, null])).toBeNull();
});
