import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { alkane, alkaneBonds, moved } from "../../../tests/factories/geometry.ts";
import { cubane } from "../../../tests/factories/graphs.ts";
import { graphOf, readXyz } from "../../../tests/factories/read-xyz.ts";
import { beside, besidePresent, readReference } from "../../../tests/factories/reference.ts";
import { type Points, pack } from "../../../tests/factories/yardstick.ts";
import { makeGraph } from "../structure.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { kcalPer } from "../units.ts";
import type { SiftRecipe } from "./recipe.ts";
import { runSift, SiftCancelled, type SiftInput } from "./run.ts";

const recipe: SiftRecipe = {
  version: 1,
  level: "level",
  levelName: "level",
  window: null,
  energyTolerance: 0.15,
  rmsdTolerance: 0.2,
  atoms: "heavy+polarH",
  symmetry: true,
  mirror: "merge",
  chirality: "achiral",
  chiralityOverridden: false,
};

const alkaneGraph = (carbons: number) =>
  makeGraph(
    Uint8Array.from({ length: 3 * carbons + 2 }, (_, a) => (a < carbons ? 6 : 1)),
    alkaneBonds(carbons).flat(),
  );

/** Input from frames and energies in kcal/mol; null is a frame without energy. */
function inputOf(
  carbons: number,
  frames: readonly Points[],
  energies: readonly (number | null)[] | null,
  change: Partial<SiftRecipe> = {},
): SiftInput {
  const levelless = energies === null ? { level: null, levelName: null, energyTolerance: null } : {};
  return {
    graph: alkaneGraph(carbons),
    block: { atoms: 3 * carbons + 2, count: frames.length, positions: pack(frames.flat() as number[][]) },
    numbers: Int32Array.from({ length: frames.length }, (_, k) => k + 1),
    energies: energies && {
      values: Float64Array.from(energies, (e) => e ?? 0),
      present: Uint8Array.from(energies, (e) => (e === null ? 0 : 1)),
      kcalPerUnit: 1,
    },
    recipe: { ...recipe, ...levelless, ...change },
  };
}

const anti = alkane(4, [180]);
const plus = alkane(4, [65]);
const minus = alkane(4, [-65]);

const populations = (result: ReturnType<typeof runSift>, weights: "copies" | "degeneracy") =>
  weigh(
    result.kept.map((k) => k.relativeEnergy!),
    result.kept.map((k) => k[weights]!),
    298.15,
  );

describe("butane, by hand", () => {
  // 0 and 0.9 kcal/mol at 298.15 K; RT 0.592485: exp(-0.9/RT) = 0.21895, Z = 1.43790.
  const energies = [0, 0.9, 0.9];

  it("counts gauche twice, as one conformer with degeneracy 2", () => {
    const result = runSift(inputOf(4, [anti, plus, minus], energies));
    expect(result.kept.map((k) => [k.frame, k.degeneracy, k.symmetryNumber, k.copies, k.found])).toEqual([
      [1, 1, 2, 1, 1],
      [2, 2, 2, 2, 2],
    ]);
    expect(result.dropped).toMatchObject([{ frame: 3, repeats: 2, energyDifference: 0, mirror: true }]);
    const p = populations(result, "copies");
    expect(p.populations[0]! * 100).toBeCloseTo(69.55, 2);
    expect(p.populations[1]! * 100).toBeCloseTo(2 * 15.23, 1);
    expect(p.freeEnergy).toBeCloseTo(-0.2152, 4);
    expect(p.energy).toBeCloseTo(0.2741, 4);
    expect((p.entropy * 298.15) / 1000).toBeCloseTo(0.4892, 4);
  });

  it("or as two conformers with degeneracy 1, and the same populations", () => {
    const result = runSift(inputOf(4, [anti, plus, minus], energies, { mirror: "keep" }));
    expect(result.kept.map((k) => [k.frame, k.degeneracy, k.copies])).toEqual([
      [1, 1, 1],
      [2, 1, 1],
      [3, 1, 1],
    ]);
    const p = populations(result, "copies");
    expect([...p.populations].map((v) => (100 * v).toFixed(2))).toEqual(["69.55", "15.23", "15.23"]);
    expect(p.freeEnergy).toBeCloseTo(-0.2152, 4);
    for (const k of result.kept.slice(1)) expect(k.mirrorRmsd).toBeCloseTo(0.489577907, 6);
  });

  it("with one gauche only is 82.04 % anti while images are kept apart: the number a missing image gives", () => {
    const result = runSift(inputOf(4, [anti, plus], [0, 0.9], { mirror: "keep" }));
    expect(100 * populations(result, "copies").populations[0]!).toBeCloseTo(82.04, 2);
    // Merged, the missing image is counted though it was never found.
    const merged = runSift(inputOf(4, [anti, plus], [0, 0.9]));
    expect(100 * populations(merged, "copies").populations[0]!).toBeCloseTo(69.55, 2);
  });

  it("does not change when frames come 5, 1 and 3 times, moved and with exchanged atoms", () => {
    // Hydrogens of both CH3 in all orders, ends exchanged.
    const exchange = (points: Points, k: number): Points => {
      const p = points.map((_, a) => a);
      const [a, b, c] = [4 + (k % 3), 4 + ((k + 1) % 3), 4 + ((k + 2) % 3)];
      [p[4], p[5], p[6]] = [a, b, c];
      if (k % 2) [p[11], p[12]] = [12, 11];
      if (k % 4 > 1) return p.map((i) => points[[3, 2, 1, 0, 11, 12, 13, 9, 10, 7, 8, 4, 5, 6][i]!]!);
      return p.map((i) => points[i]!);
    };
    const shown = [anti, anti, anti, anti, anti, plus, minus, minus, minus].map((points, k) =>
      moved(exchange(points, k), { quaternion: [1, k / 5, -k / 3, 0.2], shift: [k, -k, 10] }),
    );
    const e = [0, 0, 0, 0, 0, 0.9, 0.9, 0.9, 0.9];
    for (const atoms of ["heavy", "all"] as const) {
      const result = runSift(inputOf(4, shown, e, { mirror: "keep", atoms }));
      expect(result.kept.map((k) => [k.frame, k.found])).toEqual([
        [1, 5],
        [6, 1],
        [7, 3],
      ]);
      for (const d of result.dropped) expect(d.rmsd).toBeLessThan(1e-6);
      const p = populations(result, "copies").populations;
      expect([...p].map((v) => (100 * v).toFixed(2))).toEqual(["69.55", "15.23", "15.23"]);
    }
  });
});

describe("mirror images and copies", () => {
  it("hexane g+ t g- is its own mirror image: degeneracy 1, symmetry number 1, yet two copies", () => {
    const frames = [alkane(6, [180, 180, 180]), alkane(6, [65, 180, -65])];
    const { kept } = runSift(inputOf(6, frames, [0, 1.302]));
    expect(kept[1]!.mirrorRmsd).toBeLessThan(1e-6);
    expect(kept.map((k) => [k.degeneracy, k.symmetryNumber, k.copies])).toEqual([
      [1, 2, 1],
      [1, 1, 2],
    ]);
  });

  it("pentane TT, TG, GG, GX count 1, 4, 2, 4 copies", () => {
    const frames = [
      [180, 180],
      [180, 65],
      [65, 65],
      [65, -95],
    ].map((t) => alkane(5, t));
    const { kept } = runSift(inputOf(5, frames, [0, 0.614, 0.961, 2.813]));
    expect(kept.map((k) => [k.degeneracy, k.symmetryNumber, k.copies])).toEqual([
      [1, 2, 1],
      [2, 1, 4],
      [2, 2, 2],
      [2, 1, 4],
    ]);
  });

  it("a tolerance above the mirror RMSD loses the factor 2, and the mirror RMSD stays to tell", () => {
    const result = runSift(inputOf(4, [plus], [0], { rmsdTolerance: 0.5 }));
    expect(result.kept).toMatchObject([{ degeneracy: 1 }]);
    expect(result.kept[0]!.mirrorRmsd).toBeCloseTo(0.489577907, 6);
    // "Within" is <=: at the mirror RMSD itself the image is within.
    const exactly = result.kept[0]!.mirrorRmsd;
    expect(runSift(inputOf(4, [plus], [0], { rmsdTolerance: exactly })).kept[0]!.degeneracy).toBe(1);
    expect(runSift(inputOf(4, [plus], [0], { rmsdTolerance: exactly - 1e-9 })).kept[0]!.degeneracy).toBe(2);
  });

  it("names the mirror image only where it is the nearer one", () => {
    const result = runSift(inputOf(4, [plus, plus, minus], [0, 0, 0]));
    expect(result.dropped.map((d) => d.mirror)).toEqual([undefined, true]);
  });

  it("where the work bound of the symmetry number is met, copies is null and scales nothing", () => {
    // 14 methane molecules: 14! 24^14 exchanges, far beyond what can be looked through.
    const bonds: number[] = [];
    for (let m = 0; m < 14; m++) for (let h = 1; h < 5; h++) bonds.push(5 * m, 5 * m + h);
    const graph = makeGraph(
      Uint8Array.from({ length: 70 }, (_, a) => (a % 5 ? 1 : 6)),
      bonds,
    );
    const positions = Float64Array.from({ length: 210 }, (_, i) => 0.02 * Math.sin(12.9 * i));
    const input: SiftInput = {
      graph,
      block: { atoms: 70, count: 1, positions },
      numbers: Int32Array.of(1),
      energies: { values: Float64Array.of(0), present: Uint8Array.of(1), kcalPerUnit: 1 },
      recipe: { ...recipe, atoms: "heavy", symmetry: false },
    };
    const [only] = runSift(input).kept;
    expect([only!.symmetryNumber, only!.copies]).toEqual([null, null]);
  });
});

describe("order, window and energies", () => {
  const frames = [plus, anti, minus, anti, plus];

  it("walks by energy, equal energies by frame number, and names the first kept one that fits", () => {
    const result = runSift(inputOf(4, frames, [0.9, 0, 0.9, 0.1, 0.8], { mirror: "keep" }));
    expect(result.kept.map((k) => [k.frame, k.relativeEnergy])).toEqual([
      [2, 0],
      [5, 0.8],
      [3, 0.9],
    ]);
    expect(result.dropped.map((d) => [d.frame, d.repeats])).toEqual([
      [1, 5],
      [4, 2],
    ]);
    expect(result.dropped[0]!.energyDifference).toBeCloseTo(0.1, 12);
  });

  it("takes tolerances and window as <=, without slack", () => {
    const at = (energy: number, change: Partial<SiftRecipe>) =>
      runSift(inputOf(4, [anti, anti], [0, energy], change));
    expect(at(0.25, { energyTolerance: 0.25 }).kept).toHaveLength(1);
    expect(at(0.25 + 1e-12, { energyTolerance: 0.25 }).kept).toHaveLength(2);
    expect(at(3, { window: 3 }).outsideWindow).toEqual([]);
    expect(at(3 + 1e-9, { window: 3 }).outsideWindow).toEqual([2]);
    expect(at(5, { energyTolerance: null }).kept).toHaveLength(1);
    expect(at(0, { energyTolerance: 0, rmsdTolerance: 0 }).kept).toHaveLength(1);
  });

  it("measures the window from the lowest frame and lists frames without energy", () => {
    const result = runSift(inputOf(4, frames, [1, null, 0, 4.5, null], { window: 3 }));
    expect(result.outsideWindow).toEqual([4]);
    expect(result.withoutEnergy).toEqual([2, 5]);
    // Frame 1 shows the mirror image of frame 3, but lies too far above it in energy.
    expect(result.kept.map((k) => k.frame)).toEqual([3, 1]);
  });

  it("subtracts in the unit of the file and converts once", () => {
    const input = inputOf(4, [anti, plus], [0, 0]);
    input.energies!.values.set([-157.189112, -157.188159]);
    const hartree = { ...input, energies: { ...input.energies!, kcalPerUnit: kcalPer("hartree") } };
    const result = runSift(hartree);
    expect(result.kept[1]!.relativeEnergy).toBe((-157.188159 - -157.189112) * kcalPer("hartree"));
  });

  it("without energies walks in file order; relative energies are null", () => {
    const result = runSift(inputOf(4, frames, null));
    expect(result.kept.map((k) => [k.frame, k.relativeEnergy, k.found])).toEqual([
      [1, null, 3],
      [2, null, 2],
    ]);
    expect(result.dropped.map((d) => [d.frame, d.repeats, d.energyDifference])).toEqual([
      [3, 1, null],
      [4, 2, null],
      [5, 1, null],
    ]);
  });

  it("takes no frames, and frames that all lack an energy", () => {
    expect(runSift(inputOf(4, [], [])).kept).toEqual([]);
    const none = runSift(inputOf(4, [anti, plus], [null, null]));
    expect([none.kept, none.withoutEnergy]).toEqual([[], [1, 2]]);
  });

  it("counts pairs whose geometry was compared: energy alone decides the others", () => {
    expect(runSift(inputOf(4, [anti, plus, minus], [0, 1, 2])).pairsExamined).toBe(0);
    expect(runSift(inputOf(4, [anti, plus, minus], [0, 1, 2], { energyTolerance: null })).pairsExamined).toBe(
      3,
    );
  });

  it("refuses parts that do not fit", () => {
    const input = inputOf(4, frames, [0, 0, 0, 0, 0]);
    expect(() => runSift({ ...input, graph: cubane() })).toThrow(RangeError);
    expect(() => runSift({ ...input, numbers: Int32Array.of(1) })).toThrow(RangeError);
    expect(() => runSift({ ...input, energies: null })).toThrow(RangeError);
    const short = { ...input.energies!, values: Float64Array.of(0) };
    expect(() => runSift({ ...input, energies: short })).toThrow(RangeError);
    expect(() => runSift({ ...input, block: { ...input.block, positions: new Float64Array(3) } })).toThrow(
      RangeError,
    );
    input.energies!.values[2] = Number.NaN;
    expect(() => runSift(input)).toThrow("frame 3");
  });
});

describe("hooks", () => {
  const input = inputOf(4, [anti, plus, minus, anti], [0, 0.9, 0.9, 0]);

  it("tell progress from 0 to 1 and the seconds of the given clock", () => {
    const seen: number[] = [];
    let clock = 1000;
    const result = runSift(input, { progress: (f) => seen.push(f), now: () => (clock += 250) });
    expect(seen[0]).toBe(0);
    expect(seen.at(-1)).toBe(1);
    expect([...seen].sort((a, b) => a - b)).toEqual(seen);
    expect(result.seconds).toBe(0.25);
    expect(runSift(input).seconds).toBe(0);
  });

  it("cancel at once", () => {
    expect(() => runSift(input, { cancelled: () => true })).toThrow(SiftCancelled);
    let looks = 0;
    expect(() => runSift(input, { cancelled: () => ++looks > 2 })).toThrow(SiftCancelled);
  });

  it("compare nothing more once the word has come", () => {
    const frames = Array.from({ length: 300 }, (_, k) => alkane(6, [60 + k, 300 - k, 2 * k]));
    const long = inputOf(6, frames, null, { rmsdTolerance: 0.01 });
    let stop = false;
    let asked = 0;
    const told: number[] = [];
    const progress = (fraction: number) => {
      told.push(fraction);
      stop = fraction >= 0.5;
    };
    const cancelled = () => {
      asked += Number(stop);
      return stop;
    };
    expect(() => runSift(long, { progress, cancelled })).toThrow(SiftCancelled);
    expect(asked).toBe(1);
    expect(told.at(-1)).toBe(0.5);
  });

  it("change nothing in the result", () => {
    const hooked = runSift(input, { progress() {}, cancelled: () => false, now: () => 0 });
    expect(JSON.stringify(hooked)).toBe(JSON.stringify(runSift(input)));
  });
});

describe("laws", () => {
  const set = readReference("ensembles/ac-ala-nhme-loose.xyz", "ensembles/ac-ala-nhme-loose");
  const { atoms, count, positions } = set.frames.block;
  const chosen = (rows: readonly number[], change: Partial<SiftRecipe> = {}): SiftInput => ({
    graph: set.graph,
    block: {
      atoms,
      count: rows.length,
      positions: Float64Array.from(
        rows.flatMap((r) => [...positions.subarray(3 * atoms * r, 3 * atoms * (r + 1))]),
      ),
    },
    numbers: Int32Array.from(rows, (r) => r + 1),
    energies: {
      values: Float64Array.from(rows, (r) => set.energies[r]!),
      present: new Uint8Array(rows.length).fill(1),
      kcalPerUnit: 1,
    },
    recipe: { ...recipe, mirror: "keep", energyTolerance: null, ...change },
  });
  const everyRow = [...Array(count).keys()];

  it("the distinct set does not depend on the order of the rows (all energies differ)", () => {
    expect(new Set(set.energies).size).toBe(count);
    const expected = runSift(chosen(everyRow));
    const shuffled = fc.shuffledSubarray(everyRow, { minLength: count, maxLength: count });
    fc.assert(
      fc.property(shuffled, (rows) => {
        const result = runSift(chosen(rows));
        expect({ ...result, pairsExamined: 0 }).toEqual({ ...expected, pairsExamined: 0 });
      }),
      { seed: 20291, numRuns: 10 },
    );
  });

  it("sifting the distinct set again drops nothing", () => {
    const first = runSift(chosen(everyRow));
    const again = runSift(chosen(first.kept.map((k) => k.frame - 1)));
    expect(again.dropped).toEqual([]);
    expect(again.kept.map((k) => k.frame)).toEqual(first.kept.map((k) => k.frame));
    expect(first.kept.length).toBeLessThan(count);
  });

  it("every frame is kept or dropped once, and each dropped one lies within both tolerances of what it repeats", () => {
    const result = runSift(chosen(everyRow, { energyTolerance: 0.3, atoms: "all" }));
    const seen = [...result.kept, ...result.dropped].map((f) => f.frame).sort((a, b) => a - b);
    expect(seen).toEqual(everyRow.map((r) => r + 1));
    expect(result.kept.reduce((sum, k) => sum + k.found, 0)).toBe(count);
    for (const d of result.dropped) expect(d.rmsd <= 0.2 && d.energyDifference! <= 0.3).toBe(true);
  });

  it("mirror images of everything give the same distinct set", () => {
    const input = chosen(everyRow);
    const image = { ...input, block: { ...input.block, positions: input.block.positions.map((v) => -v) } };
    const [one, other] = [runSift(input), runSift(image)];
    expect(other.kept.map((k) => k.frame)).toEqual(one.kept.map((k) => k.frame));
    other.dropped.forEach((d, k) => {
      expect(d.repeats).toBe(one.dropped[k]!.repeats);
      expect(d.rmsd).toBeCloseTo(one.dropped[k]!.rmsd, 9);
    });
  });

  it("same input, same bytes (F12)", () => {
    const text = () => JSON.stringify(runSift(chosen(everyRow, { atoms: "all" })));
    expect(text()).toBe(text());
  });

  it("by index only, exchanged atoms count as different", () => {
    const swapped = anti.map((_, a) => anti[[0, 1, 2, 3, 5, 4, 6, 7, 8, 9, 10, 11, 12, 13][a]!]!);
    const frames = [anti, swapped];
    expect(runSift(inputOf(4, frames, [0, 0], { atoms: "all" })).kept).toHaveLength(1);
    const byIndex = runSift(inputOf(4, frames, [0, 0], { atoms: "all", symmetry: false }));
    // The symmetry number is one of the conformer, whatever the recipe compares.
    expect(byIndex.kept.map((k) => k.symmetryNumber)).toEqual([2, 2]);
    expect(byIndex.kept).toHaveLength(2);
  });
});

// Counts from the notes of the reference data; RDKit's RMSD gives the same.
describe.skipIf(!besidePresent)("large ensembles (../shared/reference)", () => {
  const large = (name: string) => {
    const frames = readXyz(`${beside}large/${name}.xyz.gz`);
    const energies = Float64Array.from(frames.comments, Number);
    const count = frames.block.count;
    const sift = (rows: number[]) =>
      runSift({
        graph: graphOf(frames),
        block: {
          ...frames.block,
          count: rows.length,
          positions: Float64Array.from(
            rows.flatMap((r) => [
              ...frames.block.positions.subarray(
                3 * frames.block.atoms * r,
                3 * frames.block.atoms * (r + 1),
              ),
            ]),
          ),
        },
        numbers: Int32Array.from(rows, (r) => r + 1),
        energies: {
          values: Float64Array.from(rows, (r) => energies[r]!),
          present: new Uint8Array(rows.length).fill(1),
          kcalPerUnit: kcalPer("hartree"),
        },
        recipe: { ...recipe, atoms: "heavy", mirror: "keep", energyTolerance: 0.12, rmsdTolerance: 0.15 },
      }).kept.length;
    const byEnergy = [...Array(count).keys()].sort((a, b) => energies[a]! - energies[b]! || a - b);
    return { sift, byEnergy };
  };

  it("M: 582 of 2,000, and 99 of the 484 lowest", () => {
    const { sift, byEnergy } = large("M");
    expect(sift([...byEnergy].sort((a, b) => a - b))).toBe(582);
    expect(sift(byEnergy.slice(0, 484))).toBe(99);
  });

  it("S: 346 of 500", () => {
    const { sift, byEnergy } = large("S");
    expect(sift([...byEnergy].sort((a, b) => a - b))).toBe(346);
  });
});
