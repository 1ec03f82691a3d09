import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { profileGap, profilesExceed, squareLimit } from "../align/shape.ts";
import { INDEX_DIRECTIONS, LeaderIndex } from "./leader-index.ts";
import { principalDirections } from "./principal.ts";
import { ShapeStore } from "./shape-store.ts";

/** Profiles of `n` distances behind their norm. */
const profiles = (n: number) =>
  fc.array(
    fc.array(fc.integer({ min: 0, max: 400 }), { minLength: n, maxLength: n }).map((row) => {
      const distances = row.map((v) => v / 100);
      return Float64Array.of(Math.hypot(...distances), ...distances);
    }),
    { minLength: 1, maxLength: 60 },
  );

const cases = fc
  .integer({ min: 1, max: 7 })
  .chain((n) =>
    fc.record({ n: fc.constant(n), rows: profiles(n), tolerance: fc.integer({ min: 0, max: 200 }) }),
  );

function indexOf(n: number, rows: Float64Array[], tolerance: number, binsFrom?: number) {
  const store = new ShapeStore(n + 1);
  const sample = Float64Array.from(rows.flatMap((row) => [...row]));
  const directions = principalDirections(sample, rows.length, n, n + 1, 1, INDEX_DIRECTIONS);
  const index = new LeaderIndex(n, () => directions, store, squareLimit(n, tolerance), binsFrom);
  let leaders = 0;
  const add = (row: Float64Array) => {
    index.add(leaders++, row);
    store.push(row);
  };
  return {
    add,
    near: (row: Float64Array, first: number) => index.near(row, first),
    nearestFirst: (row: Float64Array, first: number) => index.nearestFirst(row, first),
  };
}

describe("index of leaders", () => {
  it("finds all whose profiles are near and no other, in their order", () => {
    fc.assert(
      fc.property(cases, fc.nat(), fc.constantFrom(0, 7, 1000), ({ n, rows, tolerance }, skip, binsFrom) => {
        const limit = squareLimit(n, tolerance / 100);
        const index = indexOf(n, rows, tolerance / 100, binsFrom);
        rows.forEach((row, step) => {
          const first = skip % (step + 1);
          const expected = rows.flatMap((other, k) =>
            k < step && k >= first && !profilesExceed(n, row, 0, other, 0, limit) ? [k] : [],
          );
          // From call to call `first` may not fall: a fresh index for each.
          const fresh = indexOf(n, rows, tolerance / 100, binsFrom);
          for (const other of rows.slice(0, step)) fresh.add(other);
          expect([...fresh.near(row, first)]).toEqual(expected);
          const byGap = [...fresh.nearestFirst(row, first)];
          expect(byGap.toSorted((a, b) => a - b)).toEqual(expected);
          // In groups: none comes before one that is nearer by more than a group is wide.
          const gaps = byGap.map((k) => profileGap(n, row, 0, rows[k]!, 0, limit));
          for (const [k, gap] of gaps.entries())
            expect(Math.max(...gaps.slice(0, k + 1))).toBeLessThanOrEqual(gap + limit / 32);
          expect(index.near(row, 0).length).toBeGreaterThanOrEqual(expected.length);
          index.add(row);
        });
      }),
      { seed: 20280, numRuns: 90 },
    );
  });

  it("leaves behind what lies below the first asked for, over many chunks", () => {
    const rows = Array.from({ length: 700 }, (_, k) => Float64Array.of(0, (k % 5) / 100, 1));
    const index = indexOf(2, rows, 0.5);
    rows.forEach((row, k) => {
      const first = Math.max(0, k - 200);
      expect([...index.near(row, first)]).toEqual(Array.from({ length: k - first }, (_, i) => first + i));
      index.add(row);
    });
  });
});

describe("principal directions", () => {
  it("are orthonormal, whatever the data, also where they hardly differ", () => {
    fc.assert(
      fc.property(cases, ({ n, rows }) => {
        const sample = Float64Array.from(rows.flatMap((row) => [...row]));
        const found = principalDirections(sample, rows.length, n, n + 1, 1, 4);
        const count = found.length / n;
        expect(count).toBe(Math.min(4, n));
        for (let a = 0; a < count; a++) {
          for (let b = 0; b <= a; b++) {
            let dot = 0;
            for (let k = 0; k < n; k++) dot += found[a * n + k]! * found[b * n + k]!;
            expect(Math.abs(dot - (a === b ? 1 : 0))).toBeLessThan(1e-12);
          }
        }
      }),
      { seed: 20281, numRuns: 200 },
    );
  });

  it("follow the spread", () => {
    const sets = Float64Array.from(
      { length: 300 },
      (_, k) => [10 * Math.sin(k), Math.sin(2 * k), 0.1 * Math.sin(3 * k)][k % 3]!,
    );
    const found = principalDirections(sets, 100, 3, 3, 0, 3);
    expect(Math.abs(found[0]!)).toBeGreaterThan(0.99);
    expect(Math.abs(found[4]!)).toBeGreaterThan(0.9);
  });
});
