import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { makeGraph } from "../structure.ts";
import { type FrameMatches, matchFrames, type NumberedFrames } from "./match-frames.ts";

// Hydrogen peroxide as a family of shapes: one torsion tells frames apart. Heavy atoms and polar hydrogens are all atoms.
const GRAPH = makeGraph(Uint8Array.of(8, 8, 1, 1), [0, 1, 0, 2, 1, 3]);

function peroxide(degrees: number): number[] {
  const t = (degrees * Math.PI) / 180;
  return [0, 0, 0, 1.45, 0, 0, -0.2, 0.95, 0, 1.65, 0.95 * Math.cos(t), 0.95 * Math.sin(t)];
}

/** Turned about the first bond and moved: the same conformer elsewhere. */
function turned(frame: number[], degrees: number): number[] {
  const t = (degrees * Math.PI) / 180;
  return frame.map((_, k) => {
    const a = k - (k % 3);
    const [x = 0, y = 0, z = 0] = frame.slice(a, a + 3);
    const moved = [x + 3, y * Math.cos(t) - z * Math.sin(t), y * Math.sin(t) + z * Math.cos(t)];
    return moved[k % 3] ?? 0;
  });
}

function framesOf(all: number[][]): NumberedFrames {
  return {
    block: { atoms: 4, count: all.length, positions: Float64Array.from(all.flat()) },
    numbers: Int32Array.from(all, (_, k) => k + 1),
  };
}

function match(own: number[][], other: number[][], mirror = false, tolerance = 0.05): FrameMatches {
  return matchFrames({
    graph: GRAPH,
    own: framesOf(own),
    other: framesOf(other),
    atoms: "heavy+polarH",
    symmetry: true,
    tolerance,
    mirror,
  });
}

const TORSIONS = [30, 60, 90, 120, 150];

describe("frames of two files", () => {
  it("with equal coordinates match in any order, each copy with one of its own", () => {
    const own = [...TORSIONS, 30].map(peroxide);
    const found = match(own, [...own].reverse());
    expect([...found.partner].sort()).toEqual([0, 1, 2, 3, 4, 5]);
    expect([...found.how]).toEqual([1, 1, 1, 1, 1, 1]);
    found.partner.forEach((other, row) => {
      expect([...own].reverse()[other]).toEqual(own[row]);
    });
    expect(found.pairs).toBe(0);
  });

  it("with equal copies keep those at the same place together", () => {
    const own = [30, 30, 30].map(peroxide);
    expect([...match(own, own).partner]).toEqual([0, 1, 2]);
  });

  it("match by structure when moved, turned and relabelled", () => {
    const own = TORSIONS.map(peroxide);
    const order = [3, 0, 4, 2, 1];
    const other = order.map((k) => {
      const [o1, o2, h1, h2] = [0, 3, 6, 9].map((at) =>
        turned(peroxide(TORSIONS[k] ?? 0), 40).slice(at, at + 3),
      );
      return [o2, o1, h2, h1].flatMap((place) => place ?? []);
    });
    const found = match(own, other);
    expect([...found.partner]).toEqual([1, 4, 3, 0, 2]);
    expect([...found.how]).toEqual([2, 2, 2, 2, 2]);
    for (const rmsd of found.rmsd) expect(rmsd).toBeLessThan(1e-7);
  });

  it("keep their order where all lie a little beside their own", () => {
    const found = match(
      TORSIONS.map(peroxide),
      TORSIONS.map((t) => peroxide(t + 1)),
    );
    expect([...found.partner]).toEqual([0, 1, 2, 3, 4]);
    expect(found.inOrder).toBe(true);
  });

  it("stay alone beyond the tolerance", () => {
    const found = match([30, 90].map(peroxide), [150, 31].map(peroxide));
    expect([...found.partner]).toEqual([1, -1]);
    expect(found.shared).toEqual([]);
    expect(found.sharedOther).toEqual([]);
  });

  it("name two that became one: the nearer has it, the other is listed", () => {
    // Twelve frames, eleven partners: the last two merged, at a place nearer to the first of them.
    const own = [10, 22, 34, 46, 58, 70, 82, 94, 106, 118, 130, 133].map(peroxide);
    const merged = [10, 22, 34, 46, 58, 70, 82, 94, 106, 118, 131].map((t) => turned(peroxide(t), 25));
    const found = match(own, [...merged].reverse());
    expect([...found.partner].filter((row) => row >= 0)).toHaveLength(11);
    expect(found.partner[10]).toBe(0);
    expect(found.partner[11]).toBe(-1);
    expect(found.shared.map(({ row, nearest }) => [row, nearest])).toEqual([[11, 0]]);
    expect(found.sharedOther).toEqual([]);
  });

  it("name one that became two", () => {
    const found = match(
      [60, 120].map(peroxide),
      [61, 63, 120].map((t) => turned(peroxide(t), 10)),
    );
    expect([...found.partner]).toEqual([0, 2]);
    expect(found.sharedOther.map(({ row, nearest }) => [row, nearest])).toEqual([[1, 0]]);
  });

  it("match mirror images only where asked, after all that fit as they are", () => {
    const own = [60, -60].map(peroxide);
    const other = [61, 62].map((t) => turned(peroxide(t), 15));
    expect([...match(own, other).partner]).toEqual([0, -1]);
    const merged = match(own, other, true);
    expect([...merged.partner]).toEqual([0, 1]);
    expect([...merged.how]).toEqual([2, 3]);
  });

  it("are never used twice, and never lie beyond the tolerance", () => {
    const torsion = fc.integer({ min: 1, max: 179 });
    const list = fc.array(torsion, { minLength: 1, maxLength: 12 });
    fc.assert(
      fc.property(list, list, (a, b) => {
        const found = match(
          a.map(peroxide),
          b.map((t) => turned(peroxide(t), 33)),
        );
        const used = [...found.partner].filter((row) => row >= 0);
        expect(new Set(used).size).toBe(used.length);
        expect(Math.max(...found.rmsd)).toBeLessThanOrEqual(0.05);
        // Whoever has no partner is listed exactly where some frame lies within the tolerance.
        const alone = found.shared.map(({ row }) => row);
        found.partner.forEach((partner, row) => {
          if (partner >= 0) expect(alone).not.toContain(row);
        });
      }),
      { seed: 41, numRuns: 60 },
    );
  });

  it("say so where the bound on work was met", () => {
    const many = Array.from({ length: 40 }, (_, k) => turned(peroxide(90 + k / 1000), k));
    const own = Array.from({ length: 40 }, (_, k) => peroxide(90 + (39 - k) / 1000 + 0.0003));
    const input = { graph: GRAPH, own: framesOf(own), other: framesOf(many.slice(1)) };
    const rule = { atoms: "heavy+polarH" as const, symmetry: true, tolerance: 0.05, mirror: false };
    expect(matchFrames({ ...input, ...rule }, 5).complete).toBe(false);
    expect(matchFrames({ ...input, ...rule }).complete).toBe(true);
  });
});
