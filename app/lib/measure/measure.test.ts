import { describe, expect, it } from "vitest";
import { formatMeasure, measureKind, measureLabel, measureValue } from "./measure.ts";

describe("a pick of atoms", () => {
  const elements = [6, 6, 6, 6, 7, 16];
  const square = Float64Array.of(0, 1, 0, 0, 0, 0, 1, 0, 0, 1, 0, 1);

  it("is named by element and number in the file, joined by en dashes", () => {
    expect(measureLabel(elements, [2, 3, 4, 5])).toBe("C3\u2013C4\u2013N5\u2013S6");
    expect(measureLabel(elements, [0])).toBe("C1");
    expect(measureLabel(elements, [])).toBe("");
  });

  it("measures a distance, an angle, a torsion by its number of atoms", () => {
    expect([[], [0], [0, 1], [0, 1, 2], [0, 1, 2, 3]].map((atoms) => measureKind(atoms))).toEqual([
      null,
      null,
      "distance",
      "angle",
      "torsion",
    ]);
    expect(measureValue(square, [0])).toBeNull();
    expect(measureValue(square, [0, 1])).toBe(1);
    expect(measureValue(square, [0, 1, 2])).toBe(90);
    expect(measureValue(square, [0, 1, 2, 3])).toBe(90);
  });

  it("is written with unit, true minus and the digits of its kind", () => {
    expect(formatMeasure("torsion", -153.8)).toBe("\u2212154°");
    expect(formatMeasure("torsion", -0.2)).toBe("0°");
    expect(formatMeasure("distance", 5.8212)).toBe("5.82\u00a0Å");
    expect(formatMeasure("angle", null)).toBe("undefined");
  });
});
