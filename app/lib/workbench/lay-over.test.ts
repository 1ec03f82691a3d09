import { describe, expect, test } from "vitest";
import { layOver } from "./lay-over.ts";

// Hydrogen peroxide twisted by +90 and by -90 degrees about O-O: one is the mirror image of the other.
const peroxide = { elements: [1, 8, 8, 1], bonds: [0, 1, 1, 2, 2, 3] };
const twisted = (hand: 1 | -1) => Float64Array.from([0.9, 0, -0.3, 0, 0, 0, 0, 0, 1.45, 0, hand * 0.9, 1.75]);
const settings = { atoms: "all", symmetry: true } as const;

describe("laying one structure over another", () => {
  test("the mirror image is taken, and said, where the recipe counts it", () => {
    const { distance, positions } = layOver(peroxide, { ...settings, mirror: true }, twisted(1), twisted(-1));
    expect(distance.mirror).toBe(true);
    expect(distance.rmsd).toBeCloseTo(0, 6);
    // What is drawn has the hand of the first: laid over it once more nothing has to be reflected.
    const again = layOver(peroxide, { ...settings, mirror: false }, twisted(1), positions);
    expect(again.distance.rmsd).toBeCloseTo(0, 6);
  });

  test("otherwise nothing is reflected, and the hands stay apart", () => {
    const { distance } = layOver(peroxide, { ...settings, mirror: false }, twisted(1), twisted(-1));
    expect(distance.mirror).toBe(false);
    expect(distance.rmsd).toBeGreaterThan(0.3);
  });
});
