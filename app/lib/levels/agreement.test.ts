import { existsSync, readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { beside, fixtures } from "../../../tests/factories/reference.ts";
import { quantile } from "../stats/quantile.ts";
import { compareLevels } from "./compare.ts";
import { comparisonIntervals, windowInterval } from "./intervals.ts";
import { meetLowest, pairDeviations, topAgreement } from "./ranking.ts";
import { comparisonStory, ordinal } from "./story.ts";
import { keptWithin, narrowestWindow, windowCurve } from "./window.ts";
import { bandWithin, windowBand } from "./window-band.ts";

const T = 298.15;
const CHEAP = [0.3, 0, 1.4, 1.1, 2.9, 2.5];
const REFERENCE = [0, 0.4, 0.9, 1.5, 2.2, 3];

describe("six conformers, worked by hand", () => {
  it("counts the lowest in common", () => {
    const common = [1, 2, 3].map((k) => topAgreement(CHEAP, REFERENCE, k).common);
    expect(common).toEqual([0, 2, 2]);
    expect(topAgreement(CHEAP, REFERENCE, 3).share).toBeCloseTo(2 / 3, 12);
  });

  it("takes what ties with the k-th, and says how many it took", () => {
    expect(topAgreement([0, 1, 1, 2], [0, 2, 1, 3], 2)).toEqual({
      k: 2,
      levelCount: 3,
      referenceCount: 2,
      common: 2,
      share: 2 / 3,
    });
    expect(() => topAgreement([0], [0], 2)).toThrow(RangeError);
  });

  it("says where each puts the other's lowest", () => {
    expect(meetLowest(CHEAP, REFERENCE)).toEqual({
      referenceLowest: 0,
      rankAtLevel: 2,
      aboveAtLevel: 0.3,
      levelLowest: 1,
      rankAtReference: 2,
      aboveAtReference: 0.4,
      levelTies: [1],
      referenceTies: [0],
      same: false,
    });
    expect(meetLowest([0, 0], [1, 0]).same).toBe(true);
  });

  it("sums up differences between pairs", () => {
    const pairs = pairDeviations(CHEAP.map((a, i) => a - REFERENCE[i]!));
    expect(pairs?.meanAbsolute.toFixed(5)).toBe("0.62667");
    expect(pairs?.rms.toFixed(5)).toBe("0.74655");
    expect(pairDeviations([1])).toBeNull();
  });

  it("adds up the reference population in the order of the level", () => {
    const { referencePopulations } = compareLevels({ level: CHEAP, reference: REFERENCE, temperatureK: T });
    const steps = windowCurve(CHEAP, referencePopulations);
    expect(steps.map((s) => s.kcal)).toEqual([0, 0.3, 1.1, 1.4, 2.5, 2.9]);
    expect(steps.map((s) => s.kept.toFixed(5))).toEqual([
      "0.27694",
      "0.82093",
      "0.86419",
      "0.98329",
      "0.98673",
      "1.00000",
    ]);
    expect(keptWithin(steps, 1.39).count).toBe(3);
    expect(keptWithin(steps, -1).count).toBe(0);
    expect(narrowestWindow(steps, 1)).toEqual({ share: 1, kcal: 2.9, count: 6 });
  });
});

describe("laws of the window", () => {
  const energy = fc.integer({ min: 0, max: 40 }).map((k) => k / 8);
  const lists = fc.array(fc.tuple(energy, energy), { minLength: 1, maxLength: 30 });

  it("is a step function that never falls, and the reading holds its share while anything narrower does not", () => {
    fc.assert(
      fc.property(lists, fc.double({ min: 0.01, max: 1, noNaN: true }), (list, share) => {
        const level = list.map((x) => x[0]);
        const { referencePopulations: q } = compareLevels({
          level,
          reference: list.map((x) => x[1]),
          temperatureK: T,
        });
        const steps = windowCurve(level, q);
        for (let k = 1; k < steps.length; k++) {
          expect(steps[k]!.kcal).toBeGreaterThan(steps[k - 1]!.kcal);
          expect(steps[k]!.kept).toBeGreaterThanOrEqual(steps[k - 1]!.kept);
        }
        expect(steps.at(-1)?.count).toBe(list.length);
        const w = narrowestWindow(steps, share);
        expect(keptWithin(steps, w.kcal).kept).toBeGreaterThanOrEqual(share - 1e-9);
        const narrower = steps.filter((s) => s.kcal < w.kcal).at(-1);
        if (narrower) expect(narrower.kept).toBeLessThan(share);
      }),
      { seed: 20261201, numRuns: 200 },
    );
  });

  it("sum of pair differences by sorting equals the sum over all pairs", () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -9, max: 9, noNaN: true }), { minLength: 2, maxLength: 25 }),
        (d) => {
          let absolute = 0;
          let squares = 0;
          for (let i = 0; i < d.length; i++) {
            for (let j = 0; j < i; j++) {
              absolute += Math.abs(d[i]! - d[j]!);
              squares += (d[i]! - d[j]!) ** 2;
            }
          }
          const pairs = (d.length * (d.length - 1)) / 2;
          expect(pairDeviations(d)?.meanAbsolute).toBeCloseTo(absolute / pairs, 10);
          expect(pairDeviations(d)?.rms).toBeCloseTo(Math.sqrt(squares / pairs), 10);
        },
      ),
      { seed: 20261201, numRuns: 100 },
    );
  });
});

describe("band of the window", () => {
  const input = { level: CHEAP, reference: REFERENCE, temperatureK: T, seed: 412 };

  it("closes on the curve where the reference is exact", () => {
    const band = windowBand({ ...input, error: { sigma: 0 }, draws: 2 });
    const { referencePopulations } = compareLevels(input);
    const steps = windowCurve(CHEAP, referencePopulations);
    for (const [k, step] of steps.entries()) {
      for (const value of [band.steps[k]!.low, band.steps[k]!.median, band.steps[k]!.high]) {
        expect(value).toBeCloseTo(step.kept, 6);
      }
      expect(band.steps[k]!.count).toBe(step.count);
    }
    expect(band.readings.map((r) => r.median)).toEqual([1.4, 1.4, 2.9]);
    expect(band.steps.map((s) => s.lowestKept)).toEqual([0, 1, 1, 1, 1, 1]);
  });

  it("keeps the true lowest in Phi(w/(s sqrt 2)) of the draws, one competitor at w (normal distribution)", () => {
    // Level exact, its second conformer w = 2 sqrt(2) s up in truth as well: Phi(2) = 0.97725.
    const s = 0.5;
    const w = 2 * Math.SQRT2 * s;
    const band = windowBand({
      level: [0, w],
      reference: [0, w],
      temperatureK: T,
      error: { sigma: s },
      draws: 40_000,
      seed: 1,
    });
    expect(Math.abs(band.steps[0]!.lowestKept - 0.97725)).toBeLessThan(0.003);
    expect(band.steps[1]!.lowestKept).toBe(1);
  });

  it("holds the curve between its ends and gives the same digits again", () => {
    const band = windowBand({ ...input, error: { sigma: 0.3 }, draws: 2000 });
    expect(band).toEqual(windowBand({ ...input, error: { sigma: 0.3 }, draws: 2000 }));
    for (const step of band.steps) {
      expect(step.low).toBeLessThanOrEqual(step.median);
      expect(step.median).toBeLessThanOrEqual(step.high);
    }
    expect(bandWithin(band, 1.4)?.count).toBe(4);
    expect(bandWithin(band, -1)).toBeNull();
  });
});

describe("bootstrap intervals", () => {
  it("agree with scipy's percentile bootstrap over 1,000 structures (fixtures/statistics)", () => {
    const stored = JSON.parse(readFileSync(`${fixtures}../statistics/aminoester-bootstrap.json`, "utf8")) as {
      scipy: string;
      figures: Record<string, { value: number; low: number; high: number }>;
    };
    expect(stored.scipy).toBe("1.17.1");
    const folder = `${fixtures}ensembles/aminoester`;
    const reference = (
      JSON.parse(readFileSync(`${folder}.expected.json`, "utf8")) as { relative_energies_kcal_mol: number[] }
    ).relative_energies_kcal_mol;
    const level = Array.from(readFileSync(`${folder}.uff.xyz`, "utf8").matchAll(/energy=(\S+)/g), (m) =>
      Number(m[1]),
    );
    const base = { level, reference, temperatureK: T };
    // 1,000 resamples against 20,000: an end of the interval is uncertain by about a tenth of its width.
    const found = comparisonIntervals(base, { resamples: 1000, seed: 20261201 }).intervals;
    for (const name of ["mad", "rmsd", "sd", "pearson", "spearman", "kendall"] as const) {
      const { low, high } = stored.figures[name]!;
      expect(Math.abs((found[name]?.low ?? 0) - low), name).toBeLessThan(0.12 * (high - low));
      expect(Math.abs((found[name]?.high ?? 0) - high), name).toBeLessThan(0.12 * (high - low));
    }
  }, 60_000);

  it("are exact for two conformers: three resamples in the long run", () => {
    // MSD at own minima of d = {0.5, 0} resampled: (0,0) 1/4 -> 0, (1,1) 1/4 -> 0, mixed 1/2 -> 0.25.
    const found = comparisonIntervals(
      { level: [0, 1], reference: [0, 0.5], temperatureK: T, align: "own-minimum" },
      { seed: 5 },
    );
    expect(found.intervals.msd).toMatchObject({ low: 0, high: 0.25, used: 2000 });
    expect(found.intervals.pearson).toBeNull();
    expect(found).toMatchObject({ resamples: 2000, seed: 5, generator: "xoshiro128**" });
  });

  it("keep the zero at a named conformer, drawn or not", () => {
    const input = {
      level: CHEAP,
      reference: REFERENCE,
      temperatureK: T,
      align: "common" as const,
      commonPlace: 0,
    };
    const found = comparisonIntervals(input, { seed: 5, resamples: 4000 });
    // The mean of resampled deviations from a fixed zero: sd of d over sqrt(n), about the mean of -0.267.
    const d = compareLevels(input).deviations;
    const spread = Math.sqrt(d.reduce((s, v) => s + (v + 4 / 15) ** 2, 0) / 36);
    expect(found.intervals.msd?.low).toBeCloseTo(-4 / 15 - 1.96 * spread, 1);
    expect(found.intervals.msd?.high).toBeCloseTo(-4 / 15 + 1.96 * spread, 1);
    expect(windowInterval(found, 0.95)).toEqual(found.intervals.window95);
    expect(windowInterval(found, 0.8)).toBeNull();
  });

  it("contain the figure itself in the middle of the resamples", () => {
    const found = comparisonIntervals({ level: CHEAP, reference: REFERENCE, temperatureK: T }, { seed: 9 });
    const { low, high } = found.intervals.rmsd!;
    expect(low).toBeLessThan(0.48189);
    expect(high).toBeGreaterThan(0.48189);
    expect(quantile([low, high], 0.5)).toBeGreaterThan(0);
  });
});

describe("the story in one sentence", () => {
  const tell = (
    level: number[],
    reference: number[],
    names: [string, string],
    nameOf: (i: number) => string,
  ) => {
    const comparison = compareLevels({ level, reference, temperatureK: T });
    const steps = windowCurve(level, comparison.referencePopulations);
    return comparisonStory({
      level: names[0],
      reference: names[1],
      nameOf,
      comparison,
      meeting: meetLowest(level, reference),
      window: narrowestWindow(steps, 0.95),
    });
  };
  const plain = (text: string) => text.replaceAll("\u00a0", " ");

  it("tells the six conformers", () => {
    const story = tell(CHEAP, REFERENCE, ["Cheap", "Better"], (i) => `c${i + 1}`);
    expect(plain(story.text)).toBe(
      "Cheap puts the lowest conformer of Better, c1, 2nd, 0.30 kcal/mol up, and prefers c2, which holds 28 % at Better; " +
        "to keep 95 % of the Better population, carry 1.40 kcal/mol of Cheap: 4 of 6 conformers.",
    );
    expect(plain(story.second)).toBe(
      "Over 6 conformers the two levels share 70 % of the population and agree on the order in the main; " +
        "they differ by 0.47 kcal/mol on average, 0.67 kcal/mol at most.",
    );
  });

  it("tells the hard case, cysteine at MMFF94 (J. Chem. Theory Comput. 2009, 5, 1511)", ({ skip }) => {
    const path = `${beside}cysteine-conformers/cysteine.expected.json`;
    skip(!existsSync(path), "not laid beside the checkout");
    const { relative_energies_kcal_mol: energies } = JSON.parse(readFileSync(path, "utf8")) as {
      relative_energies_kcal_mol: Record<string, number[]>;
    };
    const roman = ["I", "II", "III", "IV", "V", "VI", "VII", "VIII", "IX", "X", "XI"];
    const story = tell(energies.mmff94!, energies.published!, ["MMFF94", "published"], (i) => roman[i]!);
    expect(plain(story.text)).toBe(
      "MMFF94 puts the lowest conformer of published, I, 2nd, 0.40 kcal/mol up, and prefers VIII, which holds 2 % at published; " +
        "to keep 95 % of the published population, carry 6.09 kcal/mol of MMFF94: 9 of 11 conformers.",
    );
    expect(plain(story.second)).toContain("share 36 % of the population and hardly agree on the order");
  });

  it("says that the reference's own lowest has no energy at the level, and what is left", () => {
    const [level, reference] = [
      [0, 0.4, 1.1],
      [0, 0.3, 1],
    ];
    const comparison = compareLevels({ level: level!, reference: reference!, temperatureK: T });
    const story = comparisonStory({
      level: "part",
      reference: "cheap",
      nameOf: (i) => `c${i + 2}`,
      comparison,
      meeting: meetLowest(level!, reference!),
      window: narrowestWindow(windowCurve(level!, comparison.referencePopulations), 0.95),
      covered: { covered: 0.467, lowest: { name: "c1", share: 0.533 } },
    });
    expect(plain(story.text)).toBe(
      "The lowest conformer of cheap, c1 (53 % of its population), has no energy at part, and shares are of the remaining 47 %: " +
        "of the others, part finds the lowest conformer of cheap, c2; " +
        "to keep 95 % of the cheap population that has an energy at part (47 % of it) takes all 3 conformers, 1.10 kcal/mol of part.",
    );
  });

  it("tells agreement, a window that keeps all, and a lone conformer", () => {
    const same = tell([0, 1, 2, 3], [0, 1, 2, 3], ["A", "B"], (i) => `c${i + 1}`);
    expect(same.text).toContain("A finds the lowest conformer of B, c1; ");
    expect(same.second).toContain("agree on the whole order");
    expect(tell([0, 3], [1, 0], ["A", "B"], String).text).toContain("takes all 2 conformers");
    expect(tell([0], [1], ["A", "B"], String).text).toContain("nothing to compare");
  });

  it("tells ties at the minimum and levels without any order", () => {
    const told = (level: number[], reference: number[]) =>
      plain(tell(level, reference, ["A", "B"], (i) => `c${i + 1}`).text).split(";")[0];
    expect(told([1, 1, 1], [0, 1, 2])).toBe(
      "A gives all 3 conformers the same energy and finds no lowest one",
    );
    expect(told([0, 1, 2], [1, 1, 1])).toBe(
      "B gives all 3 conformers the same energy, so there is no lowest one for A to find",
    );
    expect(told([2, 2], [1, 1])).toContain("Both A and B give all 2 conformers the same energy");
    expect(told([0, 0, 2], [0, 1, 2])).toBe(
      "A does not tell the lowest conformer of B, c1, from 1 other that it puts as low",
    );
    expect(told([0, 1, 2], [0, 0, 2])).toBe(
      "A finds one of the 2 conformers that tie as the lowest of B, c1, and puts the others higher",
    );
    expect(told([0, 0, 2], [0, 0, 2])).toBe(
      "A and B have the same 2 conformers tied as the lowest, c1 and c2",
    );
    expect(told([1, 0, 0, 2], [0, 1, 0, 2])).toBe(
      "c3 is among the 2 conformers that tie as the lowest of A and the 2 conformers that tie as the lowest of B",
    );
    expect(told([1, 0, 0], [0, 1, 1])).toMatch(
      /^A puts the lowest conformer of B, c1, 3rd, 1.00 kcal\/mol up, and prefers c2 and c3, tied, which hold/,
    );
    expect(told([1, 2, 0], [0, 0, 1])).toMatch(
      /^A puts c1, the first of 2 conformers that tie as the lowest of B, 2nd, 1.00 kcal\/mol up, and prefers c3/,
    );
  });

  it("counts in words", () => {
    expect([1, 2, 3, 4, 11, 12, 13, 21, 102, 111].map(ordinal)).toEqual([
      "1st",
      "2nd",
      "3rd",
      "4th",
      "11th",
      "12th",
      "13th",
      "21st",
      "102nd",
      "111th",
    ]);
  });
});
