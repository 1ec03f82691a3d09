import { describe, expect, it } from "vitest";
import { followed } from "./use-held";

describe("a value held over the address", () => {
  const held = (draft: number | null, sent: number[], seen: number) => ({
    draft: draft === null ? null : { value: draft },
    sent,
    seen,
  });

  it("stays while an older step of the same walk arrives", () => {
    expect(followed(held(300, [299], 298), 299)).toEqual(held(300, [], 299));
    expect(followed(held(301, [299, 300, 301], 298), 300)).toEqual(held(301, [301], 300));
  });

  it("goes once the address says it, with every step that was overtaken", () => {
    expect(followed(held(300, [299, 300], 298), 300)).toEqual(held(null, [], 300));
  });

  it("goes where the reader goes back or on", () => {
    expect(followed(held(300, [299], 298), 310)).toEqual(held(null, [], 310));
    expect(followed(held(null, [], 299), 298)).toEqual(held(null, [], 298));
  });
});
