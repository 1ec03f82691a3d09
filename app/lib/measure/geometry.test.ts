import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { angle, distance, torsion, wrapDegrees } from "./geometry.ts";

const SEED = 20261201;

describe("distance and angle", () => {
  it("measures the 3-4-5 triangle (by hand)", () => {
    const p = Float64Array.of(0, 0, 0, 3, 0, 0, 3, 4, 0);
    expect(distance(p, 0, 2)).toBe(5);
    expect(angle(p, 0, 1, 2)).toBe(90);
    expect(angle(p, 1, 0, 2)).toBeCloseTo((Math.atan(4 / 3) * 180) / Math.PI, 12);
  });

  it("gives 109.4712° in an ideal tetrahedron: acos(-1/3), by hand", () => {
    const p = Float64Array.of(1, 1, 1, 0, 0, 0, 1, -1, -1);
    expect(angle(p, 0, 1, 2)).toBeCloseTo(109.47122063449069, 10);
  });

  it("keeps its digits near 180°, where an arc cosine would lose them", () => {
    const tilt = 1e-7;
    const p = Float64Array.of(-1, 0, 0, 0, 0, 0, 1, tilt, 0);
    expect(180 - (angle(p, 0, 1, 2) ?? 0)).toBeCloseTo((tilt * 180) / Math.PI, 12);
  });

  it("has no angle at coinciding atoms", () => {
    expect(angle(Float64Array.of(0, 0, 0, 0, 0, 0, 1, 0, 0), 0, 1, 2)).toBeNull();
  });

  it("refuses an atom that is not there", () => {
    expect(() => distance(Float64Array.of(0, 0, 0), 0, 1)).toThrow(RangeError);
    expect(() => torsion(new Float64Array(12), 0, 1, 2, 4)).toThrow(/4 atoms, found atom index 4/);
  });
});

describe("torsion", () => {
  /** Chain with unit bonds along x at j-k; i stands up, l is turned by t clockwise seen from j to k. */
  const chain = (t: number) => {
    const radians = (t * Math.PI) / 180;
    return Float64Array.of(0, 1, 0, 0, 0, 0, 1, 0, 0, 1, Math.cos(radians), Math.sin(radians));
  };

  it.each([0, 15, 60, 90, 120, 179.999, -0.001, -60, -90, -179])("reads back a chain built at %d°", (t) => {
    expect(torsion(chain(t), 0, 1, 2, 3)).toBeCloseTo(t, 9);
  });

  it("calls the trans chain 180 and not -180", () => {
    expect(torsion(Float64Array.of(0, 1, 0, 0, 0, 0, 1, 0, 0, 1, -1, 0), 0, 1, 2, 3)).toBe(180);
    expect(torsion(Float64Array.of(0, 1, 0, 0, 0, 0, 1, 0, 0, 1, -1, -0), 0, 1, 2, 3)).toBe(180);
  });

  it("is undefined where three neighbours lie on one line or coincide", () => {
    expect(torsion(Float64Array.of(-1, 0, 0, 0, 0, 0, 1, 0, 0, 1, 1, 0), 0, 1, 2, 3)).toBeNull();
    expect(torsion(Float64Array.of(0, 1, 0, 0, 0, 0, 1, 0, 0, 2, 0, 0), 0, 1, 2, 3)).toBeNull();
    expect(torsion(Float64Array.of(0, 1, 0, 0, 0, 0, 0, 0, 0, 1, 1, 0), 0, 1, 2, 3)).toBeNull();
  });

  it("reads the same from both ends and the opposite in the mirror", () => {
    const coordinate = fc.double({ min: -3, max: 3, noNaN: true });
    fc.assert(
      fc.property(fc.array(coordinate, { minLength: 12, maxLength: 12 }), (list) => {
        const p = Float64Array.from(list);
        const value = torsion(p, 0, 1, 2, 3);
        fc.pre(value !== null && Math.abs(value) < 179.99 && Math.abs(value) > 0.01);
        expect(torsion(p, 3, 2, 1, 0)).toBeCloseTo(value ?? 0, 6);
        expect(
          torsion(
            p.map((x) => -x),
            0,
            1,
            2,
            3,
          ),
        ).toBeCloseTo(-(value ?? 0), 6);
      }),
      { seed: SEED },
    );
  });

  it("does not change when the structure is turned and shifted", () => {
    const turn = fc.double({ min: -Math.PI, max: Math.PI, noNaN: true });
    fc.assert(
      fc.property(turn, turn, fc.double({ min: -179, max: 180, noNaN: true }), (a, b, t) => {
        const p = chain(t);
        const moved = new Float64Array(12);
        for (let k = 0; k < 12; k += 3) {
          const x = Math.cos(a) * p[k]! - Math.sin(a) * p[k + 1]!;
          const y = Math.sin(a) * p[k]! + Math.cos(a) * p[k + 1]!;
          moved[k] = x + 5;
          moved[k + 1] = Math.cos(b) * y - Math.sin(b) * p[k + 2]! - 2;
          moved[k + 2] = Math.sin(b) * y + Math.cos(b) * p[k + 2]! + 7;
        }
        expect(wrapDegrees((torsion(moved, 0, 1, 2, 3) ?? 0) - t)).toBeCloseTo(0, 9);
      }),
      { seed: SEED },
    );
  });
});

describe("wrapDegrees", () => {
  it.each([
    [180, 180],
    [-180, 180],
    [181, -179],
    [540, 180],
    [-360, 0],
    [-190, 170],
  ])("brings %d to %d", (from, to) => {
    expect(wrapDegrees(from)).toBe(to);
  });
});
