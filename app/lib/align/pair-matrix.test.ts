import fc from "fast-check";
import { beforeAll, describe, expect, it } from "vitest";
import { compileKernel } from "../../../scripts/build-kernel.mjs";
import { alkane, alkaneBonds } from "../../../tests/factories/geometry.ts";
import { COPIED, readReference } from "../../../tests/factories/reference.ts";
import {
  bruteForceRmsd,
  everyMapping,
  kabschRmsd,
  mirrored,
  pack,
  pointsOf,
} from "../../../tests/factories/yardstick.ts";
import { SiftCancelled } from "../sift/hooks.ts";
import { type AtomSet, type FrameBlock, makeGraph } from "../structure.ts";
import { nearestNeighbours, PairMatrixWork, packedIndex, packedLength, pairMatrix } from "./pair-matrix.ts";
import { makePlan } from "./plan.ts";

let kernel: WebAssembly.Module;
beforeAll(async () => {
  kernel = new WebAssembly.Module(await compileKernel());
});

const graphOfAlkane = (carbons: number) =>
  makeGraph(
    Uint8Array.from({ length: 3 * carbons + 2 }, (_, a) => (a < carbons ? 6 : 1)),
    alkaneBonds(carbons).flat(),
  );
const pentane = graphOfAlkane(5);

/** Conformers of an n-alkane with torsions all over the circle. */
function spread(count: number, carbons = 5): FrameBlock {
  const frames = Array.from({ length: count }, (_, k) =>
    alkane(
      carbons,
      Array.from({ length: carbons - 3 }, (_, t) => (37 * k + 64 * k * t + 5 * t) % 360),
    ),
  );
  return { atoms: 3 * carbons + 2, count, positions: pack(frames.flat()) };
}

describe("pair matrix", () => {
  it("packs the upper triangle row by row", () => {
    const places = [0, 1, 2, 3, 4].flatMap((i) => [0, 1, 2, 3, 4].filter((j) => j > i).map((j) => [i, j]));
    expect(places.map(([i, j]) => packedIndex(5, i!, j!))).toEqual(places.map((_, k) => k));
    expect(packedIndex(5, 3, 1)).toBe(packedIndex(5, 1, 3));
    expect([packedLength(0), packedLength(1), packedLength(5)]).toEqual([0, 0, 10]);
  });

  // 2 exchanges are all tried, 288 are searched; either way the yardstick looks at each.
  it.each([
    ["pentane, heavy atoms", 5, "heavy", 12],
    ["butane, all atoms", 4, "all", 4],
  ] as [string, number, AtomSet, number][])(
    "holds the least RMSD of every pair: %s",
    (_, n, atoms, count) => {
      const block = spread(count, n);
      const plan = makePlan(graphOfAlkane(n), atoms);
      const maps = [...everyMapping(plan.chain, plan.atoms)];
      const frames = Array.from({ length: count }, (_, k) =>
        pointsOf(block.positions, k, block.atoms, plan.atoms),
      );
      for (const mirror of [false, true]) {
        const { matrix, inexact } = pairMatrix({ plan, block, mirror });
        expect(inexact).toBe(0);
        for (let i = 0; i < count; i++) {
          for (let j = i + 1; j < count; j++) {
            const proper = bruteForceRmsd(frames[i]!, frames[j]!, maps);
            const image = mirror ? bruteForceRmsd(frames[i]!, mirrored(frames[j]!), maps) : Infinity;
            const expected = Math.min(proper, image);
            expect(Math.abs(matrix[packedIndex(count, i, j)]! - expected)).toBeLessThan(1e-6);
          }
        }
      }
    },
  );

  it("compares by index where symmetry is switched off, and takes chosen frames in their order", () => {
    const block = spread(9);
    const plan = makePlan(pentane, "heavy", { symmetry: false });
    const rows = Int32Array.of(7, 2, 5);
    const { matrix } = pairMatrix({ plan, block, rows });
    const frames = Array.from(rows, (row) => pointsOf(block.positions, row, 17, plan.atoms));
    const expected = [kabschRmsd(frames[0]!, frames[1]!), kabschRmsd(frames[0]!, frames[2]!)];
    expect(matrix[0]).toBeCloseTo(expected[0]!, 6);
    expect(matrix[1]).toBeCloseTo(expected[1]!, 6);
    expect(() => pairMatrix({ plan, block, rows: Int32Array.of(0, 9) })).toThrow(RangeError);
  });

  it("is the same to the last bit with the compiled kernel and without", () => {
    for (const [file, expected] of COPIED) {
      const { frames, graph } = readReference(file, expected);
      const rows = Int32Array.from({ length: Math.min(90, frames.block.count) }, (_, k) => k);
      for (const atoms of ["heavy", "heavy+polarH"] as const) {
        const plan = makePlan(graph, atoms);
        const input = { plan, block: frames.block, rows, mirror: true };
        const plain = pairMatrix(input).matrix;
        const lanes = pairMatrix({ ...input, kernel }).matrix;
        expect(new Uint32Array(lanes.buffer)).toEqual(new Uint32Array(plain.buffer));
      }
    }
  });

  it("comes out the same however tiles are shared", () => {
    const block = spread(700);
    const input = { plan: makePlan(pentane, "heavy"), block, kernel };
    const whole = pairMatrix(input).matrix;
    const shared = new Float32Array(new SharedArrayBuffer(4 * packedLength(700)));
    const threads = [new PairMatrixWork(input), new PairMatrixWork({ ...input, kernel: null })];
    expect(threads[0]!.tiles).toBeGreaterThan(10);
    for (let tile = threads[0]!.tiles - 1; tile >= 0; tile--) threads[(tile * 7) % 2]!.fill(tile, shared);
    expect(new Uint32Array(shared.buffer)).toEqual(new Uint32Array(whole.buffer));
  });

  it("tells how far it is, stops when asked, and refuses what does not fit", () => {
    const input = { plan: makePlan(pentane, "heavy"), block: spread(150) };
    const shown: number[] = [];
    pairMatrix(input, { progress: (fraction) => shown.push(fraction) });
    expect([shown[0], shown.at(-1)]).toEqual([0, 1]);
    let asked = 0;
    expect(() => pairMatrix(input, { cancelled: () => ++asked > 3 })).toThrow(SiftCancelled);
    const work = new PairMatrixWork(input);
    expect(() => work.fill(work.tiles, new Float32Array(packedLength(150)))).toThrow(RangeError);
    expect(() => work.fill(0, new Float32Array(3))).toThrow(RangeError);
  });

  it("handles no conformer, one, and two", () => {
    const plan = makePlan(pentane, "heavy");
    for (const count of [0, 1, 2]) {
      const block = { ...spread(2), count };
      expect(pairMatrix({ plan, block, kernel }).matrix.length).toBe(packedLength(count));
    }
  });
});

describe("nearest neighbours", () => {
  it("are the k least of each row, equal ones by number", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 12 }),
        fc.integer({ min: 1, max: 6 }),
        fc.infiniteStream(fc.integer({ min: 0, max: 5 })),
        (count, k, numbers) => {
          const values = [...numbers.take(packedLength(count))];
          const matrix = Float32Array.from(values);
          const found = nearestNeighbours(matrix, count, k);
          const width = Math.min(k, count - 1);
          expect(found.k).toBe(width);
          for (let i = 0; i < count; i++) {
            const others = Array.from({ length: count }, (_, j) => j).filter((j) => j !== i);
            const rmsd = (j: number) => values[packedIndex(count, i, j)]!;
            const expected = others.sort((a, b) => rmsd(a) - rmsd(b) || a - b).slice(0, width);
            expect([...found.numbers.subarray(i * width, (i + 1) * width)]).toEqual(expected);
            expect([...found.rmsds.subarray(i * width, (i + 1) * width)]).toEqual(expected.map(rmsd));
          }
        },
      ),
      { seed: 20310, numRuns: 200 },
    );
  });

  it("refuses a matrix of another size and no number", () => {
    expect(() => nearestNeighbours(new Float32Array(4), 3, 1)).toThrow(RangeError);
    expect(() => nearestNeighbours(new Float32Array(3), 3, 0)).toThrow(RangeError);
  });
});
