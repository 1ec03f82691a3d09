import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { distance, torsion } from "../measure/geometry.ts";
import { makeGraph } from "../structure.ts";
import { aboutAxis, rotate } from "./camera.ts";
import { createPlacer, type PlaceRequest } from "./placer.ts";

/** Toluene's heavy atoms: methyl, then the ring from its ipso carbon. */
const graph = makeGraph(Uint8Array.from([6, 6, 6, 6, 6, 6, 6]), [0, 1, 1, 2, 2, 3, 3, 4, 4, 5, 5, 6, 6, 1]);
const ring = Array.from({ length: 6 }, (_, k) => [
  1.4 * Math.cos((k * Math.PI) / 3),
  1.4 * Math.sin((k * Math.PI) / 3),
  0,
]);
const toluene = Float64Array.from([[2.9, 0, 0.2], ...ring].flat());
const all = Int32Array.of(0, 1, 2, 3, 4, 5, 6);

function moved(positions: Float64Array, axis: [number, number, number], angle: number): Float64Array {
  const q = aboutAxis(axis, angle);
  const out = new Float64Array(positions.length);
  for (let k = 0; k < positions.length; k += 3) {
    out.set(rotate(q, [positions[k]!, positions[k + 1]!, positions[k + 2]!]), k);
    out[k]! += 4;
  }
  return out;
}

function close(a: ArrayLike<number>, b: ArrayLike<number>): void {
  for (let k = 0; k < a.length; k++) expect(a[k]).toBeCloseTo(b[k]!, 6);
}

function request(change: Partial<PlaceRequest>): PlaceRequest {
  return { graph, anchor: toluene, reference: toluene, moved: toluene, atoms: all, tries: 8, ...change };
}

describe("createPlacer", () => {
  it("lays a turned copy on its original", () => {
    const angle = fc.double({ min: -3, max: 3, noNaN: true });
    fc.assert(
      fc.property(angle, (t) => {
        const place = createPlacer();
        const placed = place(request({ moved: moved(toluene, [1, 2, -1], t) }));
        close(placed, toluene);
      }),
      { seed: 20261201 },
    );
  });

  it("turns a flipped ring back over equivalent atoms, and leaves every atom its number", () => {
    // Atoms 2 and 6, 3 and 5 change places: the same shape, its numbers the other way round.
    const order = [0, 1, 6, 5, 4, 3, 2];
    const renamed = Float64Array.from(order.flatMap((a) => [...toluene.subarray(3 * a, 3 * a + 3)]));
    const placed = createPlacer()(request({ moved: moved(renamed, [0, 1, 1], 2) }));
    order.forEach((a, k) => {
      for (let i = 0; i < 3; i++) expect(placed[3 * k + i]).toBeCloseTo(toluene[3 * a + i]!, 6);
    });
    expect(distance(placed, 2, 3)).toBeCloseTo(distance(renamed, 2, 3), 9);
  });

  it("never reflects: a torsion keeps its sign", () => {
    const twisted = makeGraph(Uint8Array.of(6, 6, 8, 9), [0, 1, 1, 2, 2, 3]);
    const left = Float64Array.of(0, 1, 0, 0, 0, 0, 1.4, 0, 0, 1.4, 0.4, 0.9);
    const right = left.map((value, k) => (k % 3 === 2 ? -value : value));
    const placed = createPlacer()({
      ...request({}),
      graph: twisted,
      anchor: left,
      reference: left,
      moved: right,
      atoms: Int32Array.of(0, 1, 2, 3),
    });
    expect(torsion(placed, 0, 1, 2, 3)).toBeCloseTo(torsion(right, 0, 1, 2, 3)!, 6);
  });

  it("keeps the picture still when another reference is chosen", () => {
    const place = createPlacer();
    const second = moved(toluene, [1, 0, 0], 1);
    const before = place(request({ reference: toluene, moved: second }));
    const after = place(request({ reference: second, moved: second }));
    close(after, before);
    const anchor = place(request({ reference: second, moved: toluene }));
    close(anchor, toluene);
  });

  it("gives the same array again while nothing changes", () => {
    const place = createPlacer();
    const second = moved(toluene, [1, 0, 0], 1);
    expect(place(request({ moved: second }))).toBe(place(request({ moved: second })));
  });

  it("forgets what it knew of another molecule", () => {
    const place = createPlacer();
    place(request({}));
    const pair = makeGraph(Uint8Array.of(8, 8), [0, 1]);
    const anchor = Float64Array.of(0, 0, 0, 1.2, 0, 0);
    const other = Float64Array.of(0, 0, 0, 0, 1.2, 0);
    const placed = place({
      graph: pair,
      anchor,
      reference: anchor,
      moved: other,
      atoms: Int32Array.of(0, 1),
      tries: 4,
    });
    expect(placed).toHaveLength(6);
    expect(distance(placed, 0, 1)).toBeCloseTo(1.2, 9);
  });
});
