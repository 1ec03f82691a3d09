import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  aboutAxis,
  homeCamera,
  IDENTITY,
  inverse,
  multiply,
  rotate,
  turnByDrag,
  widestFace,
  ZOOM_RANGE,
  zoomBy,
} from "./camera.ts";

const SEED = 20261201;
const coordinate = fc.double({ min: -5, max: 5, noNaN: true });
const vector = fc.tuple(coordinate, coordinate, coordinate);
const turn = fc
  .tuple(vector, fc.double({ min: -3, max: 3, noNaN: true }))
  .map(([axis, angle]) => aboutAxis(axis, angle));

function close(a: ArrayLike<number>, b: ArrayLike<number>, digits = 9): void {
  for (let i = 0; i < a.length; i++) expect(a[i]).toBeCloseTo(b[i]!, digits);
}

describe("rotations", () => {
  it("turns x into y by a quarter about z", () => {
    close(rotate(aboutAxis([0, 0, 2], Math.PI / 2), [1, 0, 0]), [0, 1, 0]);
  });

  it("keeps lengths, is undone by its inverse, and composes from right to left", () => {
    fc.assert(
      fc.property(turn, turn, vector, (a, b, v) => {
        expect(Math.hypot(...rotate(a, v))).toBeCloseTo(Math.hypot(...v), 9);
        close(rotate(inverse(a), rotate(a, v)), v);
        close(rotate(multiply(a, b), v), rotate(a, rotate(b, v)));
      }),
      { seed: SEED },
    );
  });

  it("has no axis of length zero to turn about", () => {
    expect(aboutAxis([0, 0, 0], 1)).toEqual(IDENTITY);
  });
});

describe("moving the camera", () => {
  it("turns what faces the reader to the right when dragged to the right", () => {
    const { rotation } = turnByDrag(homeCamera(IDENTITY), 10, 0, 100);
    expect(rotate(rotation, [0, 0, 1])[0]).toBeGreaterThan(0);
  });

  it("turns what faces the reader down when dragged down", () => {
    const { rotation } = turnByDrag(homeCamera(IDENTITY), 0, 10, 100);
    expect(rotate(rotation, [0, 0, 1])[1]).toBeLessThan(0);
  });

  it("zooms about the pointer and stays within its range", () => {
    const camera = zoomBy(homeCamera(IDENTITY), 2, [30, -10]);
    expect(camera.zoom).toBe(2);
    // A point drawn at 30, -10 before is drawn there still.
    expect([camera.shift[0] + 2 * 30, camera.shift[1] + 2 * -10]).toEqual([30, -10]);
    expect(zoomBy(camera, 1e9).zoom).toBe(ZOOM_RANGE[1]);
    expect(zoomBy(camera, 1e-9).zoom).toBe(ZOOM_RANGE[0]);
  });
});

describe("widestFace", () => {
  /** A flat zigzag in the plane of x and y, its first atom at the left, one hetero atom above. */
  const flat = [-3, 0, 0, -1.5, 1, 0, 0, 0, 0, 1.5, 1, 0, 3, 0, 0, 1.5, 2.2, 0];
  const bonds = [0, 1, 1, 2, 2, 3, 3, 4, 3, 5];
  const hetero = (k: number) => k === 5;

  it("lays a flat molecule flat, long side across, first atom left, hetero atom up, however the file turned it", () => {
    fc.assert(
      fc.property(turn, vector, (q, shift) => {
        const points: number[] = [];
        for (let k = 0; k < 6; k++) {
          const [x, y, z] = rotate(q, [flat[3 * k]!, flat[3 * k + 1]!, flat[3 * k + 2]!]);
          points.push(x + shift[0], y + shift[1], z + shift[2]);
        }
        const home = widestFace(points, bonds, hetero);
        const seen = Array.from({ length: 6 }, (_, k) =>
          rotate(home, [points[3 * k]!, points[3 * k + 1]!, points[3 * k + 2]!]),
        );
        for (const [, , z] of seen) expect(z).toBeCloseTo(seen[0]![2], 6);
        expect(seen[0]![0]).toBeLessThan(seen[4]![0]);
        expect(seen[5]![1]).toBeGreaterThan(seen[3]![1]);
      }),
      { seed: SEED },
    );
  });

  it("shows a ring from its face though a chain makes another plane wider", () => {
    // Six atoms of a ring in the plane of x and z, and a long straight tail along x that bends out by y.
    const ring = Array.from({ length: 6 }, (_, k) => [
      1.4 * Math.cos((k * Math.PI) / 3),
      0,
      1.4 * Math.sin((k * Math.PI) / 3),
    ]);
    const tail = [
      [2.9, 0, 0],
      [3.6, 1.3, 0],
      [5.1, 1.3, 0],
    ];
    const points = [...ring, ...tail].flat();
    const home = widestFace(points, [0, 1, 1, 2, 2, 3, 3, 4, 4, 5, 5, 0, 0, 6, 6, 7, 7, 8], () => false);
    const normal = rotate(home, [0, 1, 0]);
    expect(Math.abs(normal[2])).toBeGreaterThan(0.7);
  });

  it("takes points and lines as they come", () => {
    expect(widestFace([], [], () => false)).toEqual(IDENTITY);
    expect(widestFace([1, 2, 3], [], () => false)).toEqual(IDENTITY);
    expect(widestFace([0, 0, 0, 0, 0, 1.1], [0, 1], () => false).every(Number.isFinite)).toBe(true);
  });
});
