import { describe, expect, it } from "vitest";
import { weigh } from "../thermo/boltzmann.ts";
import { averageOf, momentsOf, type SetFacts } from "./average.ts";
import { GENERAL_SET, generalCoupling, KARPLUS_SETS, karplus } from "./karplus.ts";
import { type Observable, observableValue } from "./observable.ts";
import type { AverageRule } from "./rule.ts";

// Values marked "worked out" were derived in double precision, by two routes, from the formulas named beside them.

const single = (n: number): SetFacts => ({ degeneracies: new Array(n).fill(1), mirrorMerged: false });

function average(
  rule: AverageRule,
  values: (number | null)[],
  populations: number[],
  facts = single(values.length),
) {
  return averageOf(momentsOf({ rule, values }, facts), populations);
}

describe("3J(HN-HA) of peptides, t = phi - 60 degrees", () => {
  // Parameters: J. Am. Chem. Soc. 1993, 115, 7772 and 1997, 119, 6360. Values worked out from A cos^2 t + B cos t + C.
  const [first, second] = KARPLUS_SETS;
  it.each([
    [-60, 4.1075],
    [-65, 4.7512],
    [-120, 9.87],
    [-140, 9.0023],
    [60, 6.35],
    [180, 4.1075],
  ])("phi %i gives %f Hz", (phi, hertz) => {
    expect(karplus(phi - 60, first!)).toBeCloseTo(hertz, 4);
  });
  it("with the set of 1997", () => {
    expect(karplus(-120, second!)).toBeCloseTo(4.0325, 4);
    expect(karplus(-180, second!)).toBeCloseTo(10.06, 4);
  });
  it("has its maximum at phi -120", () => {
    for (const phi of [-130, -119, -110, 0, 100]) expect(karplus(phi - 60, first!)).toBeLessThan(9.87);
  });
});

describe("H-C-C-H with substituents", () => {
  // General set of Tetrahedron 1980, 36, 2783 as printed on a public page of Colby College; values worked out.
  it.each([
    [0, 12.97],
    [60, 3.06],
    [90, 0],
    [120, 3.79],
    [180, 14.43],
  ])("without a substituent, %i degrees: %f Hz", (torsion, hertz) => {
    expect(generalCoupling(torsion, [])).toBeCloseTo(hertz, 2);
  });
  it("with one oxygen: the sign of its place matters at 60, not at 180 degrees", () => {
    expect(generalCoupling(60, [{ excess: 1.3, sign: 1 }])).toBeCloseTo(3.7253, 4);
    expect(generalCoupling(60, [{ excess: 1.3, sign: -1 }])).toBeCloseTo(1.7957, 4);
    expect(generalCoupling(180, [{ excess: 1.3, sign: 1 }])).toBeCloseTo(12.3964, 4);
  });
  it("with one carbon", () => {
    expect(generalCoupling(60, [{ excess: 0.4, sign: 1 }])).toBeCloseTo(3.1302, 4);
  });
});

describe("NOE distances", () => {
  it.each([
    [0.5, 2.779208, 3.25],
    [0.9, 2.54149, 2.65],
    [0.1, 3.416022, 3.85],
  ])("2.5 and 4.0 Å with %f of the first", (share, noe, arithmetic) => {
    const populations = [share, 1 - share];
    expect(average("r-6", [2.5, 4], populations).value).toBeCloseTo(noe, 6);
    expect(average("linear", [2.5, 4], populations).value).toBeCloseTo(arithmetic, 12);
  });
  it("a methyl group at 2.4, 3.0 and 3.6 Å: mean of r^-6 over pairs, not their sum; and of r^-3", () => {
    const third = [1 / 3, 1 / 3, 1 / 3];
    expect(average("r-6", [2.4, 3, 3.6], third).value).toBeCloseTo(2.741654, 6);
    expect(average("r-3", [2.4, 3, 3.6], third).value).toBeCloseTo(2.841156, 6);
    // The sum, as some programs print it, would be 2.282929: the mean times 3^(-1/6).
    expect(average("r-6", [2.4, 3, 3.6], third).value! * 3 ** (-1 / 6)).toBeCloseTo(2.282929, 6);
  });
  it("refuses a distance of 0 instead of averaging to 0", () => {
    expect(average("r-6", [0, 3], [0.5, 0.5])).toMatchObject({ value: null, state: "zero-distance" });
  });
});

describe("angles", () => {
  it("350 and 10 degrees: 0, R 0.984808", () => {
    const found = average("circular", [350, 10], [0.5, 0.5]);
    expect(found.value).toBeCloseTo(0, 9);
    expect(found.resultant).toBeCloseTo(0.984808, 6);
  });
  it("60, -60 and 180 degrees alike: no mean", () => {
    const found = average("circular", [60, -60, 180], [1 / 3, 1 / 3, 1 / 3]);
    expect(found).toMatchObject({ value: null, state: "undefined" });
    expect(found.resultant).toBeCloseTo(0, 12);
  });
  it("butane, gauche as a mirror pair: 180, R 0.400224", () => {
    const { populations } = weigh([0, 0.598], [1, 2], 298.15);
    const found = averageOf(
      momentsOf({ rule: "circular", values: [180, 65] }, { degeneracies: [1, 2], mirrorMerged: true }),
      populations,
    );
    expect(found.value).toBe(180);
    // The published rounding of the populations, 57.84 and 42.16 %, gives 0.400224.
    expect(found.resultant).toBeCloseTo(0.400224, 4);
    expect(average("circular", [180, 65, -65], [0.5784, 0.2108, 0.2108]).resultant).toBeCloseTo(0.400224, 5);
  });
  it("175, -175 and 170 degrees at .5, .3 and .2: 176.9959, R 0.995285", () => {
    const found = average("circular", [175, -175, 170], [0.5, 0.3, 0.2]);
    expect(found.value).toBeCloseTo(176.9959, 4);
    expect(found.resultant).toBeCloseTo(0.995285, 6);
  });
});

describe("a coupling over butane's populations", () => {
  it("13.0 and 4.5 Hz: 9.4163", () => {
    const { populations } = weigh([0, 0.598], [1, 2], 298.15);
    expect(average("linear", [13, 4.5], [...populations]).value).toBeCloseTo(9.4163, 4);
  });
});

describe("the general set on a structure", () => {
  it("an oxygen that stands anti to the other hydrogen lowers the gauche coupling", async () => {
    const { makeGraph } = await import("../structure.ts");
    const { placed } = await import("../../../tests/factories/geometry.ts");
    // H1-C1-C2-H2 at +60 degrees with O on C1: anti to H2, or at the other free place.
    const coupling = (oxygenTorsion: number) => {
      const c1 = [0, 0, 0] as [number, number, number];
      const c2 = [1.53, 0, 0] as [number, number, number];
      const h2 = placed([0, 1, 0], c1, c2, 1.09, 110, 0);
      const front = (torsion: number, length: number) => placed(h2, c2, c1, length, 110, torsion);
      const other = (torsion: number) => placed(front(60, 1.09), c1, c2, 1.09, 110, torsion);
      const rest = oxygenTorsion === 180 ? -60 : 180;
      const atoms = [
        front(60, 1.09),
        c1,
        c2,
        h2,
        front(oxygenTorsion, 1.4),
        front(rest, 1.09),
        other(180),
        other(-60),
      ];
      const graph = makeGraph(
        Uint8Array.of(1, 6, 6, 1, 8, 1, 1, 1),
        [0, 1, 1, 2, 2, 3, 1, 4, 1, 5, 2, 6, 2, 7],
      );
      const observable: Observable = {
        kind: "coupling",
        tuples: [[0, 1, 2, 3]],
        rule: "linear",
        set: GENERAL_SET,
        own: null,
      };
      return observableValue(observable, graph, Float64Array.from(atoms.flat()));
    };
    expect(coupling(180)).toBeCloseTo(1.7957, 3);
    expect(coupling(-60)).toBeCloseTo(3.7253, 3);
  });
});
