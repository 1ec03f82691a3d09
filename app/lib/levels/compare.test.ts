import { existsSync, readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { beside, fixtures } from "../../../tests/factories/reference.ts";
import { ALIGNMENTS } from "./align.ts";
import { compareLevels } from "./compare.ts";

const T = 298.15;
const CHEAP = [0.3, 0, 1.4, 1.1, 2.9, 2.5];
const REFERENCE = [0, 0.4, 0.9, 1.5, 2.2, 3];
const digits = (values: ArrayLike<number>, n: number) => Array.from(values, (v) => v.toFixed(n));

describe("six conformers, worked by hand (scipy 1.17.1 gives the same correlations)", () => {
  const compare = (align: (typeof ALIGNMENTS)[number]) =>
    compareLevels({ level: CHEAP, reference: REFERENCE, temperatureK: T, align });

  it.each([
    ["own-minimum", 0.03333, 0.46667, 0.48305, 0.7],
    ["common", -0.26667, 0.46667, 0.55076, 0.8],
    ["least-squares", 0, 0.46667, 0.48189, 0.66667],
  ] as const)("with the zero at %s", (align, msd, mad, rmsd, max) => {
    const found = compare(align);
    expect(digits([found.msd, found.mad, found.rmsd, found.max], 5)).toEqual(
      digits([msd, mad, rmsd, max], 5),
    );
    expect(found.sd?.toFixed(5)).toBe("0.52789");
  });

  it("without the common conformer's own zero", () => {
    const d = Array.from(compare("common").deviations).slice(1);
    expect((d.reduce((s, v) => s + Math.abs(v), 0) / 5).toFixed(2)).toBe("0.56");
    expect(Math.sqrt(d.reduce((s, v) => s + v * v, 0) / 5).toFixed(5)).toBe("0.60332");
  });

  it("gives correlations, populations, overlap and divergences", () => {
    const found = compare("least-squares");
    expect(found.pearson).toBeCloseTo(0.893959, 6);
    expect(found.spearman).toBeCloseTo(0.828571, 6);
    expect(found.kendall).toBeCloseTo(0.6, 12);
    expect(digits(found.referencePopulations, 5)).toEqual(
      digits([0.54399, 0.27694, 0.11909, 0.04326, 0.01327, 0.00344], 5),
    );
    expect(digits(found.levelPopulations, 5)).toEqual(
      digits([0.3214, 0.53327, 0.0502, 0.0833, 0.00399, 0.00784], 5),
    );
    expect(found.populationOverlap.toFixed(5)).toBe("0.69924");
    expect(found.klReferenceLevel.toFixed(5)).toBe("0.19246");
    expect(found.klLevelReference.toFixed(5)).toBe("0.19314");
    expect(found.jensenShannon.toFixed(6)).toBe("0.068233");
    expect(Math.sqrt(found.jensenShannon).toFixed(5)).toBe("0.26121");
  });

  it("gives the windows", () => {
    const window = compare("least-squares").window;
    expect(window.map((w) => w.share)).toEqual([0.9, 0.95, 0.99]);
    expect(
      digits(
        window.map((w) => w.kcal),
        12,
      ),
    ).toEqual(digits([1.4, 1.4, 2.9], 12));
    expect(window.map((w) => w.count)).toEqual([4, 4, 6]);
  });
});

interface ExpectedComparison {
  A: string;
  B: string;
  n: number;
  own_minimum_reference: ExpectedDeviations;
  common_reference_index: number;
  common_reference: ExpectedDeviations;
  sd_of_differences_population: number;
  pearson_r: number;
  spearman_rho: number;
  kendall_tau_b: number;
  argmin_A: number;
  temperatures: {
    T_K: number;
    population_overlap: number;
    window_at_A_keeping_B_population_kcal_mol: Record<string, number>;
  }[];
}
interface ExpectedDeviations {
  msd: number;
  mad: number;
  rmsd: number;
  max_abs: number;
  max_abs_index: number;
}
interface ExpectedFile {
  relative_energies_kcal_mol: Record<string, number[]>;
  comparisons_A_vs_B: ExpectedComparison[];
}

/** The stored energies carry 9 to 10 digits, so nothing can agree better. */
const TOLERANCE = 2e-7;

function expectComparison(level: number[], reference: number[], expected: ExpectedComparison) {
  for (const {
    T_K,
    population_overlap,
    window_at_A_keeping_B_population_kcal_mol: w,
  } of expected.temperatures) {
    const base = { level, reference, temperatureK: T_K };
    for (const [align, key] of [
      ["own-minimum", "own_minimum_reference"],
      ["common", "common_reference"],
    ] as const) {
      const found = compareLevels({ ...base, align });
      const want = expected[key];
      expect(Math.abs(found.msd - want.msd)).toBeLessThan(TOLERANCE);
      expect(Math.abs(found.mad - want.mad)).toBeLessThan(TOLERANCE);
      expect(Math.abs(found.rmsd - want.rmsd)).toBeLessThan(TOLERANCE);
      expect(Math.abs(found.max - want.max_abs)).toBeLessThan(TOLERANCE);
      expect(found.maxPlace).toBe(want.max_abs_index);
    }
    const found = compareLevels(base);
    expect(found.n).toBe(expected.n);
    expect(Math.abs(found.rmsd - expected.sd_of_differences_population)).toBeLessThan(TOLERANCE);
    expect(Math.abs((found.pearson ?? 9) - expected.pearson_r)).toBeLessThan(TOLERANCE);
    expect(Math.abs((found.spearman ?? 9) - expected.spearman_rho)).toBeLessThan(TOLERANCE);
    expect(Math.abs((found.kendall ?? 9) - expected.kendall_tau_b)).toBeLessThan(TOLERANCE);
    expect(Math.abs(found.populationOverlap - population_overlap)).toBeLessThan(TOLERANCE);
    for (const { share, kcal } of found.window)
      expect(Math.abs(kcal - w[String(share)]!)).toBeLessThan(TOLERANCE);
  }
}

describe("levels computed independently (numpy and scipy 1.10.1, stored with the reference data)", () => {
  const sets: [string, string][] = [
    ["ac-ala, three levels (own single points)", `${fixtures}ac-ala-levels/ac-ala-nhme.expected.json`],
    ["pentane (J. Phys. Chem. A 2009, 113, 11974)", `${beside}alkane-conformers/pentane.expected.json`],
    ["hexane (J. Phys. Chem. A 2009, 113, 11974)", `${beside}alkane-conformers/hexane.expected.json`],
    [
      "cysteine (J. Chem. Theory Comput. 2009, 5, 1511)",
      `${beside}cysteine-conformers/cysteine.expected.json`,
    ],
  ];
  it.for(sets)("%s", ([, path], { skip }) => {
    // Published geometries and their figures lie beside the checkout, or nowhere.
    skip(!existsSync(path), "not laid beside the checkout");
    const file = JSON.parse(readFileSync(path, "utf8")) as ExpectedFile;
    expect(file.comparisons_A_vs_B.length).toBeGreaterThan(2);
    for (const expected of file.comparisons_A_vs_B) {
      const energies = file.relative_energies_kcal_mol;
      expectComparison(energies[expected.A]!, energies[expected.B]!, expected);
    }
  });
});

it("UFF against MMFF94 over 1,000 structures of the aminoester (numpy and scipy 1.10.1)", () => {
  const folder = `${fixtures}ensembles/aminoester`;
  const file = JSON.parse(readFileSync(`${folder}.expected.json`, "utf8")) as {
    relative_energies_kcal_mol: number[];
    two_level_A_uff_B_mmff94: ExpectedComparison;
  };
  const text = readFileSync(`${folder}.uff.xyz`, "utf8");
  const uff = Array.from(text.matchAll(/energy=(\S+)/g), (match) => Number(match[1]));
  expect(uff).toHaveLength(1000);
  expectComparison(uff, file.relative_energies_kcal_mol, file.two_level_A_uff_B_mmff94);
});

describe("laws", () => {
  // Multiples of 2^-12 kcal/mol: shifted energies stay exact, so that only the code is tested.
  const energy = fc.integer({ min: -81920, max: 81920 }).map((k) => k / 4096);
  const pairs = fc.array(fc.tuple(energy, energy), { minLength: 4, maxLength: 40 });
  const options = { seed: 20261201, numRuns: 150 };

  it("do not know the zero of either level", () => {
    fc.assert(
      fc.property(pairs, fc.integer({ min: -512, max: 512 }), (list, shift) => {
        const level = list.map((x) => x[0]);
        const reference = list.map((x) => x[1]);
        for (const align of ALIGNMENTS) {
          const one = compareLevels({ level, reference, temperatureK: T, align });
          const two = compareLevels({
            level: level.map((a) => a + shift),
            reference: reference.map((b) => b - 2 * shift),
            temperatureK: T,
            align,
          });
          expect({ ...two, offset: 0 }).toEqual({ ...one, offset: 0 });
          expect(two.offset).toBeCloseTo(one.offset + 3 * shift, 9);
        }
      }),
      options,
    );
  });

  it("do not know the order of the conformers", () => {
    fc.assert(
      fc.property(pairs, (list) => {
        const back = [...list].reverse();
        const one = compareLevels({
          level: list.map((x) => x[0]),
          reference: list.map((x) => x[1]),
          temperatureK: T,
        });
        const two = compareLevels({
          level: back.map((x) => x[0]),
          reference: back.map((x) => x[1]),
          temperatureK: T,
        });
        for (const key of ["mad", "rmsd", "max", "populationOverlap", "jensenShannon"] as const) {
          expect(two[key]).toBeCloseTo(one[key], 10);
        }
        expect(two.kendall === null).toBe(one.kendall === null);
        expect(two.kendall ?? 0).toBeCloseTo(one.kendall ?? 0, 12);
        expect(two.window.map((w) => w.count)).toEqual(one.window.map((w) => w.count));
      }),
      options,
    );
  });

  it("turn about when the levels change places", () => {
    fc.assert(
      fc.property(pairs, (list) => {
        const a = list.map((x) => x[0]);
        const b = list.map((x) => x[1]);
        const one = compareLevels({ level: a, reference: b, temperatureK: T, align: "own-minimum" });
        const two = compareLevels({ level: b, reference: a, temperatureK: T, align: "own-minimum" });
        expect(two.msd).toBeCloseTo(-one.msd, 10);
        expect(two.rmsd).toBeCloseTo(one.rmsd, 10);
        expect(two.pearson ?? 0).toBeCloseTo(one.pearson ?? 0, 10);
        expect(two.kendall ?? 9).toBeCloseTo(one.kendall ?? 9, 12);
        expect(two.populationOverlap).toBeCloseTo(one.populationOverlap, 12);
        expect(two.jensenShannon).toBeCloseTo(one.jensenShannon, 10);
      }),
      options,
    );
  });

  it("find nothing between a level and itself", () => {
    fc.assert(
      fc.property(fc.array(energy, { minLength: 1, maxLength: 30 }), (level) => {
        const found = compareLevels({ level, reference: level, temperatureK: T });
        expect([found.mad, found.max, found.jensenShannon]).toEqual([0, 0, 0]);
        expect(found.populationOverlap).toBeCloseTo(1, 12);
      }),
      options,
    );
  });
});

describe("edges", () => {
  it.each([
    ["three conformers", [0, 1, 2], [0, 1, 3]],
    ["a constant level", [1, 1, 1, 1], [0, 1, 2, 3]],
    ["a constant reference", [0, 1, 2, 3], [2, 2, 2, 2]],
  ])("gives no correlation for %s", (_name, level, reference) => {
    const { pearson, spearman, kendall } = compareLevels({ level, reference, temperatureK: T });
    expect([pearson, spearman, kendall]).toEqual([null, null, null]);
  });

  it("takes one conformer", () => {
    const found = compareLevels({ level: [-700.5], reference: [3], temperatureK: T });
    expect(found).toMatchObject({ n: 1, mad: 0, sd: null, populationOverlap: 1, offset: -703.5 });
    expect(found.window).toEqual([0.9, 0.95, 0.99].map((share) => ({ share, kcal: 0, count: 1 })));
  });

  it("counts conformers of the same energy into the window together", () => {
    const found = compareLevels({ level: [0, 1, 1, 1], reference: [0, 0, 5, 5], temperatureK: T });
    expect(found.window[0]).toEqual({ share: 0.9, kcal: 1, count: 4 });
  });

  it("weighs with the copies given", () => {
    const found = compareLevels({ level: [0, 0], reference: [0, 0], weights: [1, 3], temperatureK: T });
    expect(Array.from(found.referencePopulations)).toEqual([0.25, 0.75]);
  });

  it("refuses nothing, unequal lists and energies that are none", () => {
    expect(() => compareLevels({ level: [], reference: [], temperatureK: T })).toThrow(RangeError);
    expect(() => compareLevels({ level: [1], reference: [1, 2], temperatureK: T })).toThrow(RangeError);
    expect(() => compareLevels({ level: [Number.NaN, 1], reference: [1, 2], temperatureK: T })).toThrow(
      RangeError,
    );
  });
});
