import { existsSync, readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { beside, besidePresent, fixtures, readReference } from "../../../tests/factories/reference.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { firstOrderAverageSd } from "../trust/first-order.ts";
import { kcalPer } from "../units.ts";
import { averageOf, momentsOf, type SetFacts, valueBehind } from "./average.ts";
import { contributionsOf, mostMoving } from "./contributions.ts";
import { AVERAGE_RULES, type AverageRule } from "./rule.ts";
import { averageErrors } from "./uncertainty.ts";

const single = (n: number): SetFacts => ({ degeneracies: new Array(n).fill(1), mirrorMerged: false });
const moments = (rule: AverageRule, values: (number | null)[], facts = single(values.length)) =>
  momentsOf({ rule, values }, facts);

// Mean, spread and populations of the reference program (numpy; fixtures/README.md), for both weightings.
interface ExpectedProperty {
  property: string;
  weights: "degeneracy" | "copies";
  T_K: number;
  mean: number;
  population_sd: number;
  distinct_set: string;
}

describe.each([
  "difluoroethane",
  "ac-ala-nhme",
  "ac-ala-nhme-loose",
  "aryl-ether",
  "tosylamide",
  "aminoester",
])("radius of gyration and largest distance of %s", (name) => {
  const folder = existsSync(`${fixtures}ensembles/${name}.expected.json`) ? fixtures : beside;
  const json = JSON.parse(readFileSync(`${folder}ensembles/${name}.expected.json`, "utf8"));
  const set = readReference(
    `ensembles/${name}.${name === "tosylamide" ? "sdf" : "xyz"}`,
    `ensembles/${name}`,
  );
  const csv = `${existsSync(`${fixtures}ensembles/${name}.properties.csv`) ? fixtures : beside}ensembles/${name}.properties.csv`;

  it.skipIf(!existsSync(csv))("as the reference program averages them, by degeneracy and by copies", () => {
    const [head, ...lines] = readFileSync(csv, "utf8").trim().split("\n");
    const columns = head!.split(",");
    const rows = lines.map((line) => line.split(",").map(Number));
    const distinct = set.distinct.find(
      (one) => one.atoms === "heavy" && !one.mirror_merged && one.e_tol === 0.06 && one.r_tol === 0.2,
    )!;
    const expected: ExpectedProperty[] = json.weighted_properties;
    expect(expected.length).toBeGreaterThan(3);
    for (const one of expected) {
      const values = distinct.kept.map((frame) => rows[frame]![columns.indexOf(one.property)]!);
      const weights = one.weights === "copies" ? distinct.copies : distinct.degeneracy;
      const { populations } = weigh(
        distinct.kept.map((frame) => set.energies[frame]!),
        weights.map((weight) => weight!),
        one.T_K,
      );
      const found = averageOf(moments("linear", values), populations);
      // The figures are printed with ten digits.
      expect(Math.abs(found.value! - one.mean)).toBeLessThan(1e-8);
      expect(Math.abs(found.spread! - one.population_sd)).toBeLessThan(1e-8);
      expect(found.covered).toBe(1);
    }
  });
});

interface ExpectedDipole {
  property_level: string;
  population_level: string;
  T_K: number;
  mean: number;
  rms: number;
  population_sd: number;
}

describe("dipole moments", () => {
  // numpy: every property level weighed at every level of the populations, each conformer once; dipoles as in the CSV.
  const cases = [
    ["ac-ala-levels", "ac-ala-nhme"],
    ["alkane-conformers", "butane"],
    ["alkane-conformers", "pentane"],
    ["alkane-conformers", "hexane"],
    ["cysteine-conformers", "cysteine"],
  ].map(([folder, name]) => {
    const file = `${folder}/${name}`;
    return { file, at: `${existsSync(`${fixtures}${file}.levels.csv`) ? fixtures : beside}${file}` };
  });
  // Published geometries and their tables lie beside the checkout, or nowhere.
  const present = (at: string) => existsSync(`${at}.levels.csv`);
  it.skipIf(cases.every(({ at }) => present(at)))("of alkanes and cysteine: not beside this checkout", () => {
    expect(besidePresent).toBe(false);
  });
  it.each(cases.filter(({ at }) => present(at)))("of $file, mean and root of mean square", ({ at }) => {
    const expected: ExpectedDipole[] = JSON.parse(
      readFileSync(`${at}.expected.json`, "utf8"),
    ).weighted_dipole_debye;
    const [head, ...lines] = readFileSync(`${at}.levels.csv`, "utf8").trim().split("\n");
    const columns = head!.split(",");
    // The last cells of a line are numbers; descriptions before them may hold commas.
    const numbers = (column: string) =>
      lines.map((line) => Number(line.split(",").at(columns.indexOf(column) - columns.length)));
    expect(expected.length).toBeGreaterThan(3);
    for (const one of expected) {
      const energy = columns.find(
        (column) => column.startsWith(one.population_level) && !/dipole/.test(column),
      )!;
      const energies = numbers(energy).map(
        (value) => value * (energy.endsWith("hartree") ? kcalPer("hartree") : 1),
      );
      const dipoles = numbers(`${one.property_level}_dipole_debye`);
      const { populations } = weigh(energies, new Array(energies.length).fill(1), one.T_K);
      const linear = averageOf(moments("linear", dipoles), populations);
      expect(linear.value).toBeCloseTo(one.mean, 7);
      expect(linear.spread).toBeCloseTo(one.population_sd, 7);
      expect(averageOf(moments("rms", dipoles), populations).value).toBeCloseTo(one.rms, 7);
    }
  });
});

describe("missing values", () => {
  it("are left out, the rest renormalised, and the covered share is told", () => {
    const found = averageOf(moments("linear", [1, 3, null]), [0.5, 0.45, 0.05]);
    expect(found.value).toBeCloseTo((0.5 + 1.35) / 0.95, 12);
    expect(found.covered).toBeCloseTo(0.95, 12);
  });
  it("refuse an average below 90 % covered, and take exactly 90 %", () => {
    expect(averageOf(moments("linear", [1, 3, null]), [0.5, 0.399, 0.101])).toMatchObject({
      value: null,
      spread: null,
      state: "not-covered",
    });
    expect(averageOf(moments("linear", [1, null]), [0.9, 0.1]).value).toBe(1);
    expect(averageOf(moments("linear", [null, null]), [0.9, 0.1])).toMatchObject({ covered: 0, value: null });
  });
});

describe("mirror images", () => {
  const pair: SetFacts = { degeneracies: [1, 2], mirrorMerged: true };
  it("make the optical rotation of an achiral molecule exactly 0, whatever the values", () => {
    expect(averageOf(moments("odd", [12.5, -80], pair), [0.4, 0.6])).toMatchObject({ value: 0, fixed: true });
  });
  it("spread it all the same: half at A, half at -A", () => {
    const found = averageOf(moments("odd", [3, 4], pair), [0.5, 0.5]);
    expect(found.spread).toBeCloseTo(Math.sqrt(0.5 * 9 + 0.5 * 16), 12);
  });
  it("leave a chiral molecule's rotation alone", () => {
    expect(averageOf(moments("odd", [10, 20]), [0.5, 0.5])).toMatchObject({ value: 15, fixed: false });
  });
});

describe("uncertainty from the error of the energies", () => {
  const energies = [0, 0.598];
  const weights = [1, 2];
  const populations = weigh(energies, weights, 298.15).populations;
  const quantity = moments("linear", [13, 4.5]);

  it("agrees with first order where sigma is small", () => {
    const input = { energies, weights, temperatureK: 298.15, error: { sigma: 0.03 }, seed: 5, draws: 40_000 };
    const [found] = averageErrors([quantity], input);
    const linear = firstOrderAverageSd([13, 4.5], populations, 0.03, 298.15);
    expect(Math.abs(found!.sd / linear - 1)).toBeLessThan(0.02);
  });
  it("gives the same digits for the same seed, and a range about the average", () => {
    const input = { energies, weights, temperatureK: 298.15, error: { sigma: 0.3 }, seed: 20261 };
    const [one] = averageErrors([quantity], input);
    expect(averageErrors([quantity], input)[0]).toEqual(one);
    const value = averageOf(quantity, populations).value!;
    expect(one!.low!).toBeLessThan(value);
    expect(one!.high!).toBeGreaterThan(value);
    // Worked out to first order 1.48426 Hz; the draws stay a little below, as shares cannot pass 0 and 1.
    expect(Math.abs(one!.sd - 1.42)).toBeLessThan(0.08);
  });
  it("is 0 for what symmetry fixes and where the energies are exact", () => {
    const input = { energies, weights, temperatureK: 298.15, error: { sigma: 0.5 }, seed: 1, draws: 200 };
    const facts: SetFacts = { degeneracies: [1, 2], mirrorMerged: true };
    const [odd, turned] = averageErrors(
      [moments("odd", [3, 4], facts), moments("circular", [180, 65], facts)],
      input,
    );
    expect(odd!.sd).toBe(0);
    // A torsion in both hands lies at 0 or 180 whatever the energies; its resultant moves.
    expect(turned!.resultantSd!).toBeGreaterThan(0.01);
    const exact = { ...input, error: { sigma: 0 } };
    expect(averageErrors([quantity], exact)[0]!.sd).toBeLessThan(1e-12);
  });
});

describe("contributions", () => {
  const rules = fc.constantFrom<AverageRule>("linear", "r-6", "r-3", "rms");
  const sets = fc.array(
    fc.record({
      value: fc.double({ min: 1, max: 9, noNaN: true }),
      energy: fc.double({ min: 0, max: 3, noNaN: true }),
    }),
    { minLength: 2, maxLength: 7 },
  );

  it("shares sum to 1, and each sensitivity is the numerical derivative", () => {
    fc.assert(
      fc.property(rules, sets, (rule, set) => {
        const quantity = moments(
          rule,
          set.map((one) => one.value),
        );
        const ones = set.map(() => 1);
        const energies = set.map((one) => one.energy);
        const valueAt = (e: number[]) => averageOf(quantity, weigh(e, ones, 298.15).populations).value!;
        const found = contributionsOf(quantity, weigh(energies, ones, 298.15).populations, 298.15);
        expect(found.reduce((total, one) => total + one.share!, 0)).toBeCloseTo(1, 9);
        const step = 1e-4;
        for (const [j, one] of found.entries()) {
          const moved = (by: number) => energies.map((energy, k) => (k === j ? energy + by : energy));
          const slope = (valueAt(moved(step)) - valueAt(moved(-step))) / (2 * step);
          expect(Math.abs(one.sensitivity! - slope)).toBeLessThan(1e-5 * Math.max(1, Math.abs(slope)));
        }
      }),
      { seed: 11, numRuns: 150 },
    );
  });

  it("say what the average would be without a conformer, and which one moves it most", () => {
    const quantity = moments("r-6", [4.43, 6.19, 7.4]);
    const populations = [0.16, 0.4, 0.44];
    const found = contributionsOf(quantity, populations, 298.15);
    const value = averageOf(quantity, populations).value!;
    expect(found[0]!.without).toBeCloseTo(
      averageOf(moments("r-6", [6.19, 7.4]), [0.4 / 0.84, 0.44 / 0.84]).value!,
      12,
    );
    expect(mostMoving(found, value)).toMatchObject({ index: 0 });
    expect(contributionsOf(moments("linear", [-1, 1, 2]), populations, 298.15)[0]!.share).toBeNull();
  });
});

describe("every rule", () => {
  it("gives the common value where all conformers have it, and lies between the least and the greatest", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...AVERAGE_RULES),
        fc.array(fc.double({ min: 0.5, max: 80, noNaN: true }), { minLength: 1, maxLength: 6 }),
        (rule, values) => {
          const populations = values.map(() => 1 / values.length);
          const value = averageOf(moments(rule, values), populations).value!;
          expect(value).toBeGreaterThanOrEqual(Math.min(...values) - 1e-9);
          expect(value).toBeLessThanOrEqual(Math.max(...values) + 1e-9);
          expect(
            averageOf(
              moments(
                rule,
                values.map(() => values[0]!),
              ),
              populations,
            ).value,
          ).toBeCloseTo(values[0]!, 9);
        },
      ),
      { seed: 3, numRuns: 200 },
    );
  });
  it("says of a direction that cancels that it has none", () => {
    expect(valueBehind({ rule: "circular", turn: 360 }, 0.05, 0.05)).toBeNull();
  });
});
