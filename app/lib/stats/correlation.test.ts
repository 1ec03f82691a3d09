import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { kendallTauB, pearson, spearman } from "./correlation.ts";

describe("ties", () => {
  it.each([
    // The example of scipy's documentation of kendalltau (C 2, D 6, tied pairs 2 and 1); Spearman by scipy 1.17.1.
    [[12, 2, 1, 12, 2], [1, 4, 7, 1, 0], -0.4714045208, -0.5407380704],
    // C 7, D 1 by hand; scipy 1.17.1 agrees.
    [[1, 2, 2, 3, 4], [1, 3, 2, 2, 4], 2 / 3, 0.7631578947],
    // 0.617 from SPSS in a question on Cross Validated; C 49, D 4, tied 30 and 34.
    [
      [0, 0, 0, 0, 0, 1, 1, 1, 1, 1, 2, 2, 2, 2, 2],
      [0, 0, 0, 1, 1, 1, 1, 1, 2, 2, 2, 2, 1, 2, 1],
      0.6166698388,
      0.6736096793,
    ],
  ])("of %j and %j", (x, y, tau, rho) => {
    expect(kendallTauB(x, y)).toBeCloseTo(tau, 9);
    expect(spearman(x, y)).toBeCloseTo(rho, 9);
  });
});

/** Every pair, one by one: what the counting by merging must equal. */
function tauByPairs(x: number[], y: number[]): number | null {
  let s = 0;
  let nx = 0;
  let ny = 0;
  for (let i = 0; i < x.length; i++) {
    for (let j = 0; j < i; j++) {
      const a = Math.sign(x[i]! - x[j]!);
      const b = Math.sign(y[i]! - y[j]!);
      s += a * b;
      nx += Math.abs(a);
      ny += Math.abs(b);
    }
  }
  return nx === 0 || ny === 0 ? null : s / Math.sqrt(nx) / Math.sqrt(ny);
}

describe("laws", () => {
  const small = fc.integer({ min: 0, max: 6 });
  const pairs = fc.array(fc.tuple(small, small), { minLength: 2, maxLength: 40 });
  const options = { seed: 20261201, numRuns: 300 };

  it("tau-b counts what every pair shows", () => {
    fc.assert(
      fc.property(pairs, (list) => {
        const x = list.map((p) => p[0]);
        const y = list.map((p) => p[1]);
        const expected = tauByPairs(x, y);
        const found = kendallTauB(x, y);
        if (expected === null) expect(found).toBeNull();
        else expect(found ?? 9).toBeCloseTo(expected, 12);
      }),
      options,
    );
  });

  it("ranks do not know the scale, Pearson knows no more than scale and zero", () => {
    fc.assert(
      fc.property(pairs, (list) => {
        const x = list.map((p) => p[0]);
        const y = list.map((p) => p[1]);
        const cubed = x.map((v) => v ** 3 - 5);
        expect(spearman(cubed, y) ?? 9).toBeCloseTo(spearman(x, y) ?? 9, 10);
        expect(kendallTauB(cubed, y) ?? 9).toBeCloseTo(kendallTauB(x, y) ?? 9, 12);
        const scaled = x.map((v) => 2.5 * v + 7);
        expect(pearson(scaled, y) ?? 9).toBeCloseTo(pearson(x, y) ?? 9, 10);
      }),
      options,
    );
  });
});

it("refuses lists of unequal length", () => {
  expect(() => kendallTauB([1, 2], [1])).toThrow(RangeError);
  expect(() => pearson([1, 2], [1])).toThrow(RangeError);
});

it("equal rankings give exactly 1, ties or none", () => {
  for (let n = 3; n < 60; n++) {
    const x = Array.from({ length: n }, (_, k) => (k * 7919) % 101);
    expect(kendallTauB(x, x)).toBe(1);
    const stretched = x.map((value) => 0.1 * value ** 3);
    expect(spearman(x, stretched)).toBe(1);
    expect(
      spearman(
        x,
        stretched.map((value) => -value),
      ),
    ).toBe(-1);
    expect(
      kendallTauB(
        x,
        x.map((value) => -value),
      ),
    ).toBe(-1);
  }
  expect(kendallTauB([1, 2, 2, 3], [1, 2, 2, 3])).toBe(1);
});
