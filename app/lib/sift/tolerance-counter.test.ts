import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { alkane, alkaneBonds } from "../../../tests/factories/geometry.ts";
import { COPIED, readReference } from "../../../tests/factories/reference.ts";
import { pack } from "../../../tests/factories/yardstick.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import { runSift } from "../recipe/run.ts";
import { makeGraph } from "../structure.ts";
import { type CountQuestion, ToleranceCounter } from "./tolerance-counter.ts";

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

const graph = makeGraph(
  Uint8Array.from({ length: 17 }, (_, a) => (a < 5 ? 6 : 1)),
  alkaneBonds(5).flat(),
);

const ensembles = fc.array(
  fc.record({
    torsions: fc.tuple(fc.integer({ min: -18, max: 18 }), fc.integer({ min: -18, max: 18 })),
    energy: fc.integer({ min: 0, max: 20 }),
  }),
  { minLength: 1, maxLength: 40 },
);
const settings = fc.record({
  mirror: fc.constantFrom("keep" as const, "merge" as const),
  atoms: fc.constantFrom("heavy" as const, "all" as const),
  symmetry: fc.boolean(),
});
/** A slider that is moved to and fro; a hair beside whole hundredths, so that no pair lies on the edge itself. */
const questions: fc.Arbitrary<CountQuestion[]> = fc.array(
  fc.record({
    rmsdTolerance: fc.integer({ min: 0, max: 60 }).map((hundredths) => hundredths / 100 + 1.23e-7),
    energyTolerance: fc.constantFrom(null, 0, 0.1, 0.3),
    window: fc.constantFrom(null, 0.7),
  }),
  { minLength: 1, maxLength: 12 },
);

describe("a counter", () => {
  it("counts what a sift keeps, whatever it counted before", () => {
    fc.assert(
      fc.property(ensembles, settings, questions, fc.boolean(), (frames, change, asked, levelless) => {
        const input = {
          graph,
          block: {
            atoms: 17,
            count: frames.length,
            positions: pack(
              frames.flatMap(({ torsions: [a, b] }) => alkane(5, [10 * a, 10 * b])) as number[][],
            ),
          },
          numbers: Int32Array.from({ length: frames.length }, (_, k) => k + 1),
          energies: levelless
            ? null
            : {
                values: Float64Array.from(frames, ({ energy }) => energy / 20),
                present: Uint8Array.from(frames, ({ energy }) => Number(energy < 18)),
                kcalPerUnit: 1,
              },
        };
        const level = levelless ? { level: null, levelName: null } : {};
        const counter = new ToleranceCounter({ ...input, ...change });
        for (const question of asked) {
          const whole = levelless ? { ...question, energyTolerance: null, window: null } : question;
          const { kept } = runSift({ ...input, recipe: { ...recipe, ...change, ...level, ...whole } });
          const found = counter.count(whole);
          expect([found.kept, found.exact]).toEqual([kept.length, true]);
        }
      }),
      { seed: 20291, numRuns: 120 },
    );
  });

  it.each(COPIED)("counts the sifts of %s while a slider goes up and down", (file, expected) => {
    const { frames, graph, energies } = readReference(file, expected);
    const { block } = frames;
    const input = {
      graph,
      block,
      numbers: Int32Array.from({ length: block.count }, (_, k) => k + 1),
      energies: { values: energies, present: new Uint8Array(block.count).fill(1), kcalPerUnit: 1 },
    };
    const counter = new ToleranceCounter({ ...input, atoms: "heavy", symmetry: true, mirror: "keep" });
    const count = (rmsdTolerance: number) =>
      counter.count({ window: null, energyTolerance: 0.15, rmsdTolerance }).kept;
    const single = (rmsdTolerance: number) =>
      runSift({ ...input, recipe: { ...recipe, rmsdTolerance } }).kept.length;
    for (const tolerance of [0.1, 0.105, 0.3, 0.02, 0.1]) expect(count(tolerance)).toBe(single(tolerance));
  });

  it("counts many frames without an energy tolerance, where it takes them by the nearest first", () => {
    // 36 x 20 shapes, the energies in no order of the torsions: far more leaders than are remembered pair by pair.
    const torsions = Array.from({ length: 720 }, (_, k) => [
      10 * (k % 36) - 180,
      18 * Math.floor(k / 36) - 180,
    ]);
    const count = torsions.length;
    const input = {
      graph,
      block: {
        atoms: 17,
        count,
        positions: pack(torsions.flatMap(([a, b]) => alkane(5, [a!, b!])) as number[][]),
      },
      numbers: Int32Array.from({ length: count }, (_, k) => k + 1),
      energies: {
        values: Float64Array.from({ length: count }, (_, k) => ((k * 283) % count) / 100),
        present: new Uint8Array(count).fill(1),
        kcalPerUnit: 1,
      },
    };
    const counter = new ToleranceCounter({ ...input, atoms: "heavy", symmetry: true, mirror: "keep" });
    const asked: CountQuestion[] = [
      ...[0.02, 0.15, 0.3, 0.2, 0.6, 0.02].map((tolerance) => ({
        window: null,
        energyTolerance: null,
        rmsdTolerance: tolerance + 1.23e-7,
      })),
      { window: null, energyTolerance: 5, rmsdTolerance: 0.15 + 1.23e-7 },
      { window: 4, energyTolerance: 0.5, rmsdTolerance: 0.3 + 1.23e-7 },
    ];
    const kept = asked.map(
      (question) => runSift({ ...input, recipe: { ...recipe, ...question } }).kept.length,
    );
    expect(asked.map((question) => counter.count(question))).toMatchObject(
      kept.map((one) => ({ kept: one, exact: true })),
    );
    expect(kept[0]).toBeGreaterThan(600);
    expect(kept[4]).toBeLessThan(100);
  });

  it("goes in parts, and a count left alone does not disturb the next", () => {
    const frames = Array.from({ length: 20 }, (_, k) => alkane(5, [9 * k, 180]));
    const counter = new ToleranceCounter({
      graph,
      block: { atoms: 17, count: 20, positions: pack(frames.flat() as number[][]) },
      numbers: Int32Array.from({ length: 20 }, (_, k) => k + 1),
      energies: null,
      atoms: "heavy",
      symmetry: true,
      mirror: "keep",
    });
    const question = { window: null, energyTolerance: null, rmsdTolerance: 0.3 };
    const left = counter.begin({ ...question, rmsdTolerance: 0.1 });
    for (let k = 0; k < 5; k++) left.next();
    expect(left.done).toBe(0.25);
    const run = counter.begin(question);
    while (run.next());
    expect(run.done).toBe(1);
    expect(run.kept).toBe(counter.count(question).kept);
  });
});
