import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { GAS_CONSTANT_KCAL, thermalEnergyKcal } from "../units.ts";
import { weigh } from "./boltzmann.ts";

const RT = thermalEnergyKcal(298.15);
const percent = (energies: number[], weights: number[], temperature = 298.15) =>
  Array.from(weigh(energies, weights, temperature).populations, (p) => 100 * p);
const rounded = (values: ArrayLike<number>, digits: number) => Array.from(values, (v) => v.toFixed(digits));

describe("hand-worked example", () => {
  // E = 0, 0.5, 1.0, 2.0 kcal/mol, g = 1, 2, 1, 1; at 298.15 K Z = 1 + 0.860057 + 0.184925 + 0.034197 = 2.079179.
  const energies = [0, 0.5, 1, 2];
  const weights = [1, 2, 1, 1];

  it.each([
    // biome-ignore lint/suspicious/noApproximativeNumericConstant: it only happens to lie near e
    [298.15, [0.48096, 0.41365, 0.08894, 0.01645], -0.43368, 0.32866, 2.5569, 0.8498, 3.6208, 2.7182],
    [200, [0.60397, 0.34331, 0.04879, 0.00394], -0.2004, 0.22832, 2.1436, 1.236, 2.9409, 2.3181],
    [310.15, [0.47059, 0.41817, 0.0929, 0.01834], -0.46457, 0.33866, 2.5898, 0.8166, 3.6812, 2.7549],
  ])("at %f K", (temperature, p, free, energy, entropy, capacity, micro, list) => {
    const found = weigh(energies, weights, temperature);
    expect(rounded(found.populations, 5)).toEqual(rounded(p, 5));
    expect(found.freeEnergy).toBeCloseTo(free, 5);
    expect(found.energy).toBeCloseTo(energy, 5);
    expect(found.entropy).toBeCloseTo(entropy, 4);
    expect(found.heatCapacity).toBeCloseTo(capacity, 4);
    expect(found.effectiveCount).toBeCloseTo(micro, 4);
    // Entries of the list that share the population: exp(-sum p ln p), another number when a weight is not 1.
    const entries = Math.exp(-found.populations.reduce((s, v) => s + v * Math.log(v), 0));
    expect(entries).toBeCloseTo(list, 4);
  });

  it("does not move with the zero of energy, even a million kcal/mol away", () => {
    const base = weigh(energies, weights, 298.15);
    for (const shift of [-3, 17.25, 1e6]) {
      const moved = weigh(
        energies.map((e) => e + shift),
        weights,
        298.15,
      );
      moved.populations.forEach((p, k) => {
        expect(Math.abs(p - base.populations[k]!)).toBeLessThan(1e-9);
      });
      expect(moved.freeEnergy).toBeCloseTo(base.freeEnergy, 9);
    }
  });

  it("counts two equal entries as one of weight 2", () => {
    const one = weigh(energies, weights, 298.15);
    const split = weigh([0, 0.5, 0.5, 1, 2], [1, 1, 1, 1, 1], 298.15);
    expect(split.freeEnergy).toBeCloseTo(one.freeEnergy, 12);
    expect(split.entropy).toBeCloseTo(one.entropy, 12);
    expect(split.effectiveCount).toBeCloseTo(one.effectiveCount, 12);
    expect(split.populations[1]! + split.populations[2]!).toBeCloseTo(one.populations[1]!, 12);
  });

  it("twice every weight changes F by -RT ln 2 and no population", () => {
    const one = weigh(energies, weights, 298.15);
    const twice = weigh(
      energies,
      weights.map((w) => 2 * w),
      298.15,
    );
    expect(rounded(twice.populations, 14)).toEqual(rounded(one.populations, 14));
    expect(twice.freeEnergy - one.freeEnergy).toBeCloseTo(-0.410679, 6);
  });

  it("goes to the minimum near 0 K without NaN and to the weights at high temperature", () => {
    const cold = weigh(energies, weights, 1e-3);
    expect([...cold.populations]).toEqual([1, 0, 0, 0]);
    expect([cold.energy, cold.entropy, cold.heatCapacity]).toEqual(
      [0, 0, 0].map((v) => expect.closeTo(v, 12)),
    );
    expect(rounded(weigh(energies, weights, 1e9).populations, 6)).toEqual([
      "0.200000",
      "0.400000",
      "0.200000",
      "0.200000",
    ]);
  });
});

describe("conformer equilibria", () => {
  // Reference energies: Gruzman et al., J. Phys. Chem. A 2009, 113, 11974; populations derived from them, no ZPE or
  // thermal terms, weighted by copies.
  const PENTANE = [0, 0.614, 0.961, 2.813];

  it.each([
    ["butane", [0, 0.598], [1, 2], [57.839, 42.161], -0.32439, 2.646],
    ["butane, gauche counted once (wrong)", [0, 0.598], [1, 1], [73.288, 26.712], -0.18412, 1.7867],
    [
      "butane, anti listed twice (wrong)",
      [0, 0, 0.598],
      [1, 1, 2],
      [36.644, 36.644, 26.712],
      -0.5948,
      3.5734,
    ],
    ["pentane", PENTANE, [1, 4, 2, 4], [35.103, 49.813, 13.866, 1.217], -0.62026, 6.3332],
    [
      "pentane, all counted once (wrong)",
      PENTANE,
      [1, 1, 1, 1],
      [64.064, 22.727, 12.653, 0.555],
      -0.26383,
      2.4903,
    ],
    [
      "hexane",
      [0, 0.595, 0.604, 0.934, 1.178, 1.302, 1.25, 2.632, 2.74, 3.283, 3.083, 4.925],
      [1, 4, 2, 4, 2, 2, 2, 4, 4, 4, 4, 2],
      [20.505, 30.046, 14.797, 16.955, 5.616, 4.555, 4.973, 0.965, 0.804, 0.322, 0.451, 0.01],
      -0.93878,
      15.5372,
    ],
  ])("%s", (_name, energies, weights, shares, free, micro) => {
    const found = weigh(energies, weights, 298.15);
    expect(rounded(percent(energies, weights), 3)).toEqual(rounded(shares, 3));
    expect(found.freeEnergy).toBeCloseTo(free, 5);
    expect(found.effectiveCount).toBeCloseTo(micro, 4);
  });

  it("pentane by the mirror factor alone comes out wrong, which is why copies are counted", () => {
    expect(rounded(percent(PENTANE, [1, 2, 2, 2]), 3)).toEqual(["47.128", "33.438", "18.616", "0.817"]);
  });

  it("butane from the measured enthalpy of 0.660 kcal/mol: electron diffraction at 14 C finds 60 +- 15 % anti", () => {
    // Gas Raman: Balabin, J. Phys. Chem. A 2009, 113, 1012. Electron diffraction: Bonham, Bartell 1959.
    expect(percent([0, 0.66], [1, 2])[0]).toBeCloseTo(60.37, 2);
    expect(Math.abs(percent([0, 0.66], [1, 2], 287.15)[0]! - 60)).toBeLessThan(15);
  });

  it.each([
    // 1.78: MP2, gas, Dixon, Matsuzawa, Walker, J. Phys. Chem. 1992, 96, 10740. 1.20 and 0.00 (gas and liquid): from memory.
    [1.78, 90.98],
    [1.2, 79.12],
    [0, 33.33],
  ])("1,2-dichloroethane, gauche %f kcal/mol above trans, is %f % trans", (energy, trans) => {
    expect(percent([0, energy], [1, 2])[0]).toBeCloseTo(trans, 2);
  });

  // A-values (axial - equatorial free energy): Reich, Organic Chemistry Data; Ph, tBu and the solvent pair of OH from a
  // table after Eliel and Wilen; Me 1.74 and OH 0.97 from memory. Shares are 100/(1 + exp(-A/RT)).
  it.each([
    ["F", 0.15, 56.3],
    ["CN", 0.17, 57.12],
    ["Br", 0.38, 65.51],
    ["Cl", 0.43, 67.39],
    ["OMe", 0.6, 73.35],
    ["OH", 0.87, 81.28],
    ["CO2Me", 1.27, 89.51],
    ["Me", 1.7, 94.63],
    ["Et", 1.75, 95.04],
    ["iPr", 2.15, 97.41],
    ["Ph", 2.8, 99.12],
    ["tBu", 4.8, 99.97],
    ["Me (1.74)", 1.74, 94.96],
    ["OH (0.97)", 0.97, 83.71],
  ])("monosubstituted cyclohexane, %s: A = %f gives %f % equatorial", (_name, a, equatorial) => {
    expect(percent([0, a], [1, 1])[0]).toBeCloseTo(equatorial, 2);
  });

  it.each([
    [0.1, 1.184],
    [0.25, 1.525],
    [0.5, 2.325],
    [1, 5.408],
    [2, 29.24],
    [3, 158.1],
    [5, 4624],
  ])("a difference of %f kcal/mol is a ratio of %f at 298.15 K", (energy, ratio) => {
    const [low, high] = weigh([0, energy], [1, 1], 298.15).populations;
    expect((low! / high!).toPrecision(4)).toBe(ratio.toPrecision(4));
  });

  it("example butane of the product: 0 and 0.9 kcal/mol", () => {
    const found = weigh([0, 0.9, 0.9], [1, 1, 1], 298.15);
    expect(rounded(percent([0, 0.9, 0.9], [1, 1, 1]), 2)).toEqual(["69.55", "15.23", "15.23"]);
    expect(found.freeEnergy).toBeCloseTo(-0.2152, 4);
    expect(found.energy).toBeCloseTo(0.2741, 4);
    expect((found.entropy * 298.15) / 1000).toBeCloseTo(0.4892, 4);
    expect(percent([0, 0.9], [1, 1])[0]).toBeCloseTo(82.04, 2);
  });
});

describe("laws", () => {
  const energy = fc.double({ min: -50, max: 50, noNaN: true });
  const weight = fc.double({ min: 0.01, max: 100, noNaN: true });
  const lists = fc
    .array(fc.tuple(energy, weight), { minLength: 1, maxLength: 40 })
    .map((pairs) => ({ e: pairs.map((p) => p[0]), w: pairs.map((p) => p[1]) }));
  const temperature = fc.double({ min: 50, max: 2000, noNaN: true });

  it("populations sum to 1, U lies within the energies, F = U - TS, C >= 0", () => {
    fc.assert(
      fc.property(lists, temperature, ({ e, w }, t) => {
        const found = weigh(e, w, t);
        expect(Math.abs(found.populations.reduce((s, p) => s + p, 0) - 1)).toBeLessThan(1e-12);
        expect(found.energy).toBeGreaterThanOrEqual(0);
        expect(found.energy).toBeLessThanOrEqual(Math.max(...e) - Math.min(...e) + 1e-12);
        const scale = 1 + Math.abs(found.freeEnergy) + found.energy;
        expect(Math.abs(found.freeEnergy - (found.energy - (t * found.entropy) / 1000))).toBeLessThan(
          1e-11 * scale,
        );
        expect(found.heatCapacity).toBeGreaterThanOrEqual(0);
      }),
      { seed: 20301, numRuns: 500 },
    );
  });

  it("S = -dF/dT and C = dU/dT", () => {
    const [e, w, t, h] = [[0, 0.5, 1, 2], [1, 2, 1, 1], 298.15, 0.01];
    const at = (temperatureK: number) => weigh(e, w, temperatureK);
    expect((-1000 * (at(t + h).freeEnergy - at(t - h).freeEnergy)) / (2 * h)).toBeCloseTo(at(t).entropy, 6);
    expect((1000 * (at(t + h).energy - at(t - h).energy)) / (2 * h)).toBeCloseTo(at(t).heatCapacity, 6);
  });

  it("the order of the list changes no digit", () => {
    fc.assert(
      fc.property(lists, temperature, ({ e, w }, t) => {
        const one = weigh(e, w, t);
        const other = weigh([...e].reverse(), [...w].reverse(), t);
        expect([...other.populations].reverse()).toEqual([...one.populations]);
        expect(other.freeEnergy).toBe(one.freeEnergy);
      }),
      { seed: 20302, numRuns: 200 },
    );
  });

  it("one state has all, F = -RT ln w", () => {
    const found = weigh([12.5], [3], 298.15);
    expect([...found.populations]).toEqual([1]);
    expect(found.freeEnergy).toBeCloseTo(-RT * Math.log(3), 12);
    expect(found.entropy).toBeCloseTo(1000 * GAS_CONSTANT_KCAL * Math.log(3), 12);
    expect(found.effectiveCount).toBeCloseTo(3, 12);
  });

  it.each([
    ["no state", [], [], 298.15],
    ["unequal lengths", [0, 1], [1], 298.15],
    ["an energy that is not finite", [0, Number.NaN], [1, 1], 298.15],
    ["a weight of 0", [0, 1], [1, 0], 298.15],
    ["a weight that is not finite", [0, 1], [1, Number.POSITIVE_INFINITY], 298.15],
    ["0 K", [0], [1], 0],
    ["no temperature", [0], [1], Number.NaN],
  ])("refuses %s", (_name, energies, weights, temperatureK) => {
    expect(() => weigh(energies, weights, temperatureK)).toThrow(RangeError);
  });
});
