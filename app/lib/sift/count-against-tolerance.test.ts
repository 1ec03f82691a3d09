import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { alkane, alkaneBonds } from "../../../tests/factories/geometry.ts";
import { COPIED, readReference } from "../../../tests/factories/reference.ts";
import { type Points, pack } from "../../../tests/factories/yardstick.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import { runSift, type SiftInput } from "../recipe/run.ts";
import { makeGraph } from "../structure.ts";
import { countAgainstTolerance } from "./count-against-tolerance.ts";
import { SiftCancelled } from "./hooks.ts";

const recipe: SiftRecipe = {
  version: 1,
  level: "level",
  levelName: "level",
  window: null,
  energyTolerance: 0.15,
  rmsdTolerance: 0.2,
  atoms: "heavy",
  symmetry: true,
  mirror: "keep",
  chirality: "achiral",
  chiralityOverridden: false,
};

/** What as many sifts, one after the other, keep. */
function oneByOne(input: SiftInput, tolerances: readonly number[], factors: readonly number[]): number[][] {
  const { energyTolerance } = input.recipe;
  return factors.map((factor) =>
    tolerances.map((rmsdTolerance) => {
      const scaled = energyTolerance === null ? null : energyTolerance * factor;
      return runSift({ ...input, recipe: { ...input.recipe, rmsdTolerance, energyTolerance: scaled } }).kept
        .length;
    }),
  );
}

function pentanes(frames: Points[], energies: number[], change: Partial<SiftRecipe>): SiftInput {
  const merged = { ...recipe, ...change };
  return {
    graph: makeGraph(
      Uint8Array.from({ length: 17 }, (_, a) => (a < 5 ? 6 : 1)),
      alkaneBonds(5).flat(),
    ),
    block: { atoms: 17, count: frames.length, positions: pack(frames.flat() as number[][]) },
    numbers: Int32Array.from({ length: frames.length }, (_, k) => k + 1),
    energies:
      merged.level === null
        ? null
        : {
            values: Float64Array.from(energies),
            present: Uint8Array.from(energies, (e) => Number(e < 0.9)),
            kcalPerUnit: 1,
          },
    recipe: merged,
  };
}

const ensembles = fc.array(
  fc.record({
    // Torsions 10 degrees apart: pairs at many distances, and plain repeats.
    torsions: fc.tuple(fc.integer({ min: -18, max: 18 }), fc.integer({ min: -18, max: 18 })),
    energy: fc.integer({ min: 0, max: 20 }),
  }),
  { minLength: 1, maxLength: 40 },
);
const recipes: fc.Arbitrary<Partial<SiftRecipe>> = fc.record({
  energyTolerance: fc.constantFrom(null, 0, 0.1, 0.3),
  mirror: fc.constantFrom("keep" as const, "merge" as const),
  atoms: fc.constantFrom("heavy" as const, "all" as const),
  symmetry: fc.boolean(),
  window: fc.constantFrom(null, 0.7),
});
const tolerances = fc.uniqueArray(fc.integer({ min: 0, max: 60 }), { minLength: 1, maxLength: 12 });

describe("counts against the tolerance", () => {
  it("equal those of sifts run one by one", () => {
    fc.assert(
      fc.property(ensembles, recipes, tolerances, fc.boolean(), (frames, change, hundredths, levelless) => {
        const without = levelless
          ? { level: null, levelName: null, energyTolerance: null, window: null }
          : {};
        const input = pentanes(
          frames.map(({ torsions: [a, b] }) => alkane(5, [10 * a, 10 * b])),
          frames.map(({ energy }) => energy / 20),
          { ...change, ...without },
        );
        // A hair beside whole hundredths, so that no pair lies on the edge itself.
        const asked = hundredths.map((h) => h / 100 + 1.23e-7);
        const found = countAgainstTolerance({ ...input, rmsdTolerances: asked, energyFactors: [2, 0.5, 1] });
        const rising = [...asked].sort((a, b) => a - b);
        const factors = input.recipe.energyTolerance === null ? [1] : [0.5, 1, 2];
        expect(found.rmsdTolerances).toEqual(rising);
        expect(found.energyFactors).toEqual(factors);
        expect(found.counts).toEqual(oneByOne(input, rising, factors));
        expect(found.exact).toBe(true);
      }),
      { seed: 20290, numRuns: 120 },
    );
  });

  it.each(COPIED)("equal those of the sifts of %s", (file, expected) => {
    const { frames, graph, energies } = readReference(file, expected);
    const { count } = frames.block;
    const input: SiftInput = {
      graph,
      block: frames.block,
      numbers: Int32Array.from({ length: count }, (_, k) => k + 1),
      energies: { values: energies, present: new Uint8Array(count).fill(1), kcalPerUnit: 1 },
      recipe: { ...recipe, energyTolerance: 0.06 },
    };
    const asked = [0.02, 0.1, 0.2, 0.5];
    const found = countAgainstTolerance({ ...input, rmsdTolerances: asked, energyFactors: [1, 4] });
    expect(found.counts).toEqual(oneByOne(input, asked, [1, 4]));
  });

  it("fall with the RMSD tolerance from all frames to few", () => {
    const frames = Array.from({ length: 30 }, (_, k) => alkane(5, [6 * k, 180]));
    const input = pentanes(
      frames,
      frames.map(() => 0),
      {},
    );
    const { counts } = countAgainstTolerance({ ...input, rmsdTolerances: [0, 0.1, 0.3, 5] });
    expect(counts[0]![0]).toBe(30);
    expect(counts[0]![3]).toBe(1);
    expect([...counts[0]!].sort((a, b) => b - a)).toEqual(counts[0]);
  });

  it("says how far it is and stops when asked", () => {
    const frames = Array.from({ length: 20 }, (_, k) => alkane(5, [9 * k, 180]));
    const input = pentanes(
      frames,
      frames.map(() => 0),
      {},
    );
    const shown: number[] = [];
    countAgainstTolerance({ ...input, rmsdTolerances: [0.1] }, { progress: (f) => shown.push(f) });
    expect([shown[0], shown.at(-1)]).toEqual([0, 1]);
    expect([...shown].sort((a, b) => a - b)).toEqual(shown);
    let asked = 0;
    const cancelled = () => ++asked > 5;
    expect(() => countAgainstTolerance({ ...input, rmsdTolerances: [0.1] }, { cancelled })).toThrow(
      SiftCancelled,
    );
  });

  it("refuses no tolerance, more than twelve, and what is below 0 or no number", () => {
    const input = pentanes([alkane(5, [180, 180])], [0], {});
    for (const wrong of [[], Array.from({ length: 13 }, (_, k) => k), [-0.1], [Number.NaN]]) {
      expect(() => countAgainstTolerance({ ...input, rmsdTolerances: wrong })).toThrow(RangeError);
    }
    expect(() =>
      countAgainstTolerance({ ...input, rmsdTolerances: [0.1], energyFactors: [1, 2, 3, 4] }),
    ).toThrow(RangeError);
  });
});
