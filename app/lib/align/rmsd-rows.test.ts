import fc from "fast-check";
import { beforeAll, describe, expect, it } from "vitest";
import { compileKernel } from "../../../scripts/build-kernel.mjs";
import { pointSets } from "../../../tests/factories/geometry.ts";
import { COPIED, readReference } from "../../../tests/factories/reference.ts";
import { pack } from "../../../tests/factories/yardstick.ts";
import { centreInto } from "./kernel.ts";
import { type CentredSets, LaneRows, PlainRows } from "./rmsd-rows.ts";

let module: WebAssembly.Module;
beforeAll(async () => {
  module = new WebAssembly.Module(await compileKernel());
});

function centred(frames: readonly Float64Array[]): CentredSets {
  const n = frames[0]!.length / 3;
  const atoms = Int32Array.from({ length: n }, (_, a) => a);
  const points = new Float64Array(3 * n * frames.length);
  const squares = Float64Array.from(frames, (frame, k) => centreInto(frame, 0, atoms, points, 3 * n * k));
  return { n, count: frames.length, points, squares };
}

/** All bytes of all rows, either way. */
function bothWays(sets: CentredSets, from = 0): [Float64Array, Float64Array] {
  const width = sets.count - from;
  const ways = [new PlainRows(sets), new LaneRows(module, sets)].map((rows) => {
    const all = new Float64Array(sets.count * width);
    for (let i = 0; i < sets.count; i++) {
      const x = sets.points.slice(3 * sets.n * i, 3 * sets.n * (i + 1));
      rows.row(x, sets.squares[i]!, from, sets.count, all.subarray(i * width, (i + 1) * width));
    }
    return all;
  });
  return [ways[0]!, ways[1]!];
}

/** Equal to the last bit, which toEqual is not for 0 and -0. */
function expectSameBits([plain, lanes]: [Float64Array, Float64Array]): void {
  expect(new BigUint64Array(lanes.buffer)).toEqual(new BigUint64Array(plain.buffer));
}

describe("rows of RMSDs in lanes", () => {
  it("are the plain kernel's to the last bit for any sets, from any start", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 9 }).chain((n) => fc.array(pointSets(n), { minLength: 1, maxLength: 11 })),
        fc.nat(),
        (frames, from) => {
          expectSameBits(bothWays(centred(frames.map(pack)), from % frames.length));
        },
      ),
      { seed: 20300, numRuns: 400 },
    );
  });

  it("also where sets are equal, nearly equal, linear, flat, or all in one point", () => {
    const line = [1, 2, 4, 7, 11].flatMap((v) => [v, 0, 0]);
    const flat = [0, 1, 2, 3, 4].flatMap((v) => [Math.cos(v), Math.sin(3 * v), 0]);
    const frames = [line, line.map((v) => v + 1e-9), line.map((v) => 2 * v), flat, flat.map((v) => -v)];
    const bent = line.map((v, k) => v + (k === 4 ? 1e-5 : 0));
    const point = line.map(() => 3);
    const solid = line.map((_, k) => Math.sin(7 * k));
    const almost = solid.map((v, k) => v + 1e-7 * Math.cos(k));
    const all = [...frames, bent, point, solid, solid, almost].map((frame) => Float64Array.from(frame));
    expectSameBits(bothWays(centred(all)));
  });

  it.each(COPIED)("also for every pair of the first 120 frames of %s", (file, expected) => {
    const { block } = readReference(file, expected).frames;
    const stride = 3 * block.atoms;
    const frames = Array.from({ length: Math.min(120, block.count) }, (_, k) =>
      block.positions.slice(k * stride, (k + 1) * stride),
    );
    expectSameBits(bothWays(centred(frames)));
  });

  it("take more sets than one call does", () => {
    const frames = Array.from({ length: 1100 }, (_, k) =>
      Float64Array.from({ length: 12 }, (_, i) => Math.sin(k + i * i)),
    );
    const sets = centred(frames);
    const x = sets.points.slice(0, 12);
    const [plain, lanes] = [new Float64Array(1097), new Float64Array(1097)];
    new PlainRows(sets).row(x, sets.squares[0]!, 3, 1100, plain);
    new LaneRows(module, sets).row(x, sets.squares[0]!, 3, 1100, lanes);
    expectSameBits([plain, lanes]);
  });
});
