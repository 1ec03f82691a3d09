import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { canonicalJson } from "./canonical-json.ts";

describe("canonical JSON", () => {
  it("does not hang on the order in which keys were set", () => {
    expect(canonicalJson({ b: 1, a: { d: [2], c: undefined } })).toBe('{"a":{"d":[2]},"b":1}');
    expect(canonicalJson({ a: { d: [2] }, b: 1 })).toBe('{"a":{"d":[2]},"b":1}');
  });

  it("reads back as the same value", () => {
    fc.assert(
      fc.property(fc.jsonValue(), (value) => {
        const text = canonicalJson(value);
        // JSON itself knows no -0.
        expect(JSON.parse(text)).toEqual(JSON.parse(JSON.stringify(value)));
        expect(canonicalJson(JSON.parse(text))).toBe(text);
      }),
      { seed: 5, numRuns: 300 },
    );
  });

  it.each([Number.NaN, Number.POSITIVE_INFINITY, [undefined], () => 1])("refuses %s", (value) => {
    expect(() => canonicalJson(value)).toThrow(TypeError);
  });

  it("keeps keys that mean something to the language as plain keys (security E07)", () => {
    expect(canonicalJson(JSON.parse('{"__proto__":1,"constructor":2}'))).toBe(
      '{"__proto__":1,"constructor":2}',
    );
  });
});
