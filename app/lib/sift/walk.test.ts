import { describe, expect, it } from "vitest";
import { planWalk } from "./walk.ts";

const energies = (values: number[], present = values.map(() => 1), kcalPerUnit = 1) => ({
  values: Float64Array.from(values),
  present: Uint8Array.from(present),
  kcalPerUnit,
});
const numbers = Int32Array.of(10, 20, 30, 40);

describe("order of the walk", () => {
  it("rises in energy; equal energies in frame number, however the rows lie", () => {
    expect([...planWalk(numbers, energies([2, 1, 2, 0]), null).rows]).toEqual([3, 1, 0, 2]);
    expect([...planWalk(Int32Array.of(40, 30, 20, 10), energies([1, 1, 1, 1]), null).rows]).toEqual([
      3, 2, 1, 0,
    ]);
  });

  it("follows frame numbers without energies", () => {
    const walk = planWalk(Int32Array.of(3, 1, 2), null, null);
    expect([[...walk.rows], walk.relative]).toEqual([[1, 2, 0], null]);
  });

  it("leaves out what has no energy, whatever number stands there", () => {
    const walk = planWalk(numbers, energies([-999, 1, Number.NaN, 0], [0, 1, 0, 1]), null);
    expect([[...walk.rows], [...walk.withoutEnergy]]).toEqual([
      [3, 1],
      [0, 2],
    ]);
    expect([...walk.relative!]).toEqual([0, 1]);
  });

  it("cuts at the window in kcal/mol, measured from the lowest", () => {
    const walk = planWalk(numbers, energies([5, 0, 1, 2], undefined, 2), 4);
    expect([[...walk.rows], [...walk.relative!], [...walk.outside]]).toEqual([[1, 2, 3], [0, 2, 4], [0]]);
  });

  it("subtracts before it converts, so that large energies keep their digits", () => {
    const walk = planWalk(
      Int32Array.of(1, 2),
      energies([-40000.000001, -40000], undefined, 627.50947406),
      null,
    );
    expect(walk.relative![1]).toBeCloseTo(6.2750947e-4, 8);
  });

  it("refuses a present energy that is not finite and a unit without size", () => {
    expect(() => planWalk(numbers, energies([0, Number.NaN, 0, 0]), null)).toThrow("frame 20");
    expect(() => planWalk(numbers, energies([0, 0, 0, 0], undefined, 0), null)).toThrow(RangeError);
  });
});
