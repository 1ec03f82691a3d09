import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { choleskyFactor } from "../stats/cholesky.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { thermalEnergyKcal } from "../units.ts";
import { drawFigures } from "./drawn-figures.ts";
import { forEachDraw } from "./energy-draws.ts";
import { firstOrderAverageSd, firstOrderFreeEnergySd, firstOrderPopulationSd } from "./first-order.ts";
import { drawsFor, populationError, smallestSet } from "./population-error.ts";

const T = 298.15;
const digits = (values: ArrayLike<number>, n: number) => Array.from(values, (v) => v.toFixed(n));

describe("two conformers with independent errors (exact values by numerical integration in numpy)", () => {
  it.each([
    // dE, sigma, p1, first-order sd, exact mean, exact sd, 95 % range, P(1 lowest)
    [0, 0.5, 0.5, 0.29836, 0.5, 0.23524, 0.0879, 0.9121, 0.5],
    [0.5, 0.5, 0.69929, 0.25097, 0.65932, 0.2173, 0.1831, 0.9602, 0.76025],
    [0.5, 0.25, 0.69929, 0.12548, 0.6861, 0.12101, 0.4193, 0.8822, 0.92135],
    [1, 0.5, 0.84394, 0.15719, 0.79225, 0.17191, 0.3427, 0.9825, 0.92135],
  ])("dE %f, sigma %f", (gap, sigma, p1, firstOrder, mean, sd, low, high, lowest) => {
    const populations = weigh([0, gap], [1, 1], T).populations;
    expect(populations[0]).toBeCloseTo(p1, 5);
    expect(firstOrderPopulationSd(populations, sigma, T)[0]).toBeCloseTo(firstOrder, 5);
    const found = populationError({
      energies: [0, gap],
      temperatureK: T,
      error: { sigma },
      draws: 100_000,
      seed: 7,
    });
    const first = found.populations[0]!;
    // Four standard errors of 100,000 draws; antithetic pairs do better on the mean.
    expect(Math.abs(first.mean - mean)).toBeLessThan(4 * Math.max(first.meanError, 1e-4));
    expect(Math.abs(first.sd - sd)).toBeLessThan(0.003);
    expect(Math.abs(first.low - low)).toBeLessThan(0.006);
    expect(Math.abs(first.high - high)).toBeLessThan(0.006);
    expect(Math.abs(found.lowestShare[0]! - lowest)).toBeLessThan(0.006);
  });
});

describe("four conformers, weights 1, 2, 1, 1, sigma 0.5 (2,000,000 draws in numpy, ± 0.001)", () => {
  const input = {
    energies: [0, 0.5, 1, 2],
    weights: [1, 2, 1, 1],
    temperatureK: T,
    error: { sigma: 0.5 },
    seed: 20,
  };
  const found = populationError({ ...input, draws: 100_000 });

  it("gives mean, spread and the share of draws in which each is lowest", () => {
    const near = (values: ArrayLike<number>, expected: number[], slack: number) =>
      expected.forEach((value, i) => {
        expect(Math.abs(values[i]! - value)).toBeLessThan(slack);
      });
    near(
      found.populations.map((p) => p.mean),
      [0.461, 0.409, 0.109, 0.022],
      0.003,
    );
    near(
      found.populations.map((p) => p.sd),
      [0.218, 0.214, 0.1, 0.026],
      0.003,
    );
    near(found.lowestShare, [0.729, 0.224, 0.047, 0.0005], 0.005);
  });

  it("names both 95 % sets", () => {
    // 0.729 + 0.224 = 0.953 reaches 95 % of the draws; 0.461 + 0.409 = 0.870 of the population needs the third.
    expect(found.lowestSet).toEqual([0, 1]);
    expect(found.populationSet).toEqual([0, 1, 2]);
    expect(found.enough).toBe(true);
  });

  it("agrees with first order in the formulas", () => {
    const { populations } = weigh(input.energies, input.weights, T);
    expect(digits(firstOrderPopulationSd(populations, 0.5, T), 5)).toEqual(
      digits([0.27188, 0.26661, 0.08334, 0.01629], 5),
    );
    expect(firstOrderFreeEnergySd(populations, 0.5)).toBeCloseTo(0.32039, 5);
    const correlated = firstOrderPopulationSd(populations, 0.5, T, 0.8);
    expect(correlated[0]! / 0.27188).toBeCloseTo(0.447214, 4);
  });
});

it("averages a coupling of 13.0 and 4.5 Hz over butane (published energy gap 0.598 kcal/mol, weights 1 and 2)", () => {
  const { populations } = weigh([0, 0.598], [1, 2], T);
  expect(13 * populations[0]! + 4.5 * populations[1]!).toBeCloseTo(9.4163, 4);
  expect(firstOrderAverageSd([13, 4.5], populations, 0.3, T)).toBeCloseTo(1.48426, 5);
});

describe("laws", () => {
  const energies = [0, 0.3, 0.8, 1.1, 2.5];

  it("agree with first order where the error is small, correlated or not", () => {
    for (const error of [{ sigma: 0.02 }, { sigma: 0.05, correlation: 0.8 }]) {
      const p = weigh(energies, [1, 1, 1, 1, 1], T).populations;
      const expected = firstOrderPopulationSd(p, error.sigma, T, error.correlation);
      const found = populationError({ energies, temperatureK: T, error, draws: 40_000, seed: 3 });
      found.populations.forEach((one, i) => {
        expect(Math.abs(one.sd / expected[i]! - 1)).toBeLessThan(0.03);
      });
    }
  });

  it("take a matrix of correlations as the constant it holds", () => {
    const rho = 0.8;
    const n = energies.length;
    const matrix = Float64Array.from({ length: n * n }, (_, k) => (Math.floor(k / n) === k % n ? 1 : rho));
    const base = { energies, temperatureK: T, draws: 40_000, seed: 3 };
    const one = populationError({ ...base, error: { sigma: 0.5, correlation: rho } });
    const two = populationError({ ...base, error: { sigma: 0.5, factor: choleskyFactor(matrix, n) } });
    one.populations.forEach((p, i) => {
      expect(Math.abs(p.sd - two.populations[i]!.sd)).toBeLessThan(0.005);
    });
  });

  it("give the same digits from the same seed, and the computed populations without error", () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0, max: 5, noNaN: true }), { minLength: 1, maxLength: 12 }),
        fc.integer({ min: 0, max: 2 ** 32 - 1 }),
        (list, seed) => {
          const input = { energies: list, temperatureK: T, error: { sigma: 0.4 }, draws: 20, seed };
          expect(populationError(input)).toEqual(populationError(input));
          const exact = weigh(list, new Float64Array(list.length).fill(1), T).populations;
          forEachDraw({ ...input, error: { sigma: 0 }, draws: 2 }, (p) => {
            p.forEach((value, i) => {
              expect(value).toBeCloseTo(exact[i]!, 12);
            });
          });
        },
      ),
      { seed: 20261201, numRuns: 60 },
    );
  });

  it("mirror every second draw, so that a linear figure has no error of its mean", () => {
    const found = drawFigures(
      { energies, temperatureK: T, error: { sigma: 0.5 }, draws: 200, seed: 1 },
      1,
      (_p, e, out) => {
        out[0] = e[2]!;
      },
    );
    expect(found.figures[0]!.mean).toBeCloseTo(0.8, 12);
    expect(found.figures[0]!.meanError).toBeLessThan(1e-12);
    expect(found).toMatchObject({ draws: 200, seed: 1, generator: "xoshiro128**" });
  });
});

describe("edges", () => {
  it("takes fewer draws for very many conformers, and pairs always", () => {
    expect(drawsFor(31, 10_000)).toBe(10_000);
    expect(drawsFor(9001, 10_000)).toBe(4442);
    expect(drawsFor(50_000, 10_000)).toBe(1000);
  });

  it("finds smallest sets, ties by place", () => {
    expect(smallestSet([0.25, 0.25, 0.25, 0.25], 0.5)).toEqual([0, 1]);
    expect(smallestSet([1], 0.95)).toEqual([0]);
  });

  it("refuses what cannot be drawn", () => {
    const base = { energies: [0, 1], temperatureK: T, error: { sigma: 0.5 }, seed: 1 };
    const noop = () => {};
    expect(() => forEachDraw({ ...base, energies: [] }, noop)).toThrow(RangeError);
    expect(() => forEachDraw({ ...base, draws: 3 }, noop)).toThrow(/pairs/);
    expect(() => forEachDraw({ ...base, error: { sigma: -1 } }, noop)).toThrow(/below zero/);
    expect(() => forEachDraw({ ...base, error: { sigma: [0.1] } }, noop)).toThrow(RangeError);
    expect(() => forEachDraw({ ...base, error: { sigma: 1, correlation: 1 } }, noop)).toThrow(/correlation/);
    expect(() => forEachDraw({ ...base, seed: -1 }, noop)).toThrow(/seed/);
    expect(thermalEnergyKcal(T)).toBeCloseTo(0.592485, 6);
  });

  it("says where a matrix of correlations is not positive definite", () => {
    expect(choleskyFactor(Float64Array.of(1, 2, 2, 1), 2)).toBeNull();
  });
});
