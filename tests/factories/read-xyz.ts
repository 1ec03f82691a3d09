import { readFileSync } from "node:fs";
import { gunzipSync } from "node:zlib";
import { type FrameBlock, type Graph, makeGraph } from "../../app/lib/structure.ts";

/** Minimal readers for well-formed test files; the product's own readers are tested elsewhere. */

export interface TestFrames {
  elements: Uint8Array;
  block: FrameBlock;
  /** Comment line, or the SDF record's energy field. */
  comments: string[];
}

const NUMBER: Record<string, number> = { H: 1, C: 6, N: 7, O: 8, F: 9, P: 15, S: 16, Cl: 17, Br: 35 };
// Cordero et al., Dalton Trans. 2008, 2832.
const RADIUS: Record<number, number> = {
  1: 0.31,
  6: 0.76,
  7: 0.71,
  8: 0.66,
  9: 0.57,
  15: 1.07,
  16: 1.05,
  17: 1.02,
  35: 1.2,
};

export function readXyz(path: string): TestFrames {
  const bytes = readFileSync(path);
  const lines = (path.endsWith(".gz") ? gunzipSync(bytes) : bytes).toString("latin1").split("\n");
  const atoms = Number(lines[0]);
  const count = Math.floor(lines.length / (atoms + 2));
  const positions = new Float64Array(3 * atoms * count);
  const comments: string[] = [];
  const elements = new Uint8Array(atoms);
  for (let f = 0; f < count; f++) {
    comments.push(lines[f * (atoms + 2) + 1]!);
    for (let a = 0; a < atoms; a++) {
      const [symbol, x, y, z] = lines[f * (atoms + 2) + 2 + a]!.trim().split(/\s+/);
      elements[a] = NUMBER[symbol!]!;
      positions.set([Number(x), Number(y), Number(z)], 3 * (f * atoms + a));
    }
  }
  return { elements, block: { atoms, count, positions }, comments };
}

/** V2000 records; `comments` holds the value of `field`. */
export function readSdf(path: string, field: string): TestFrames {
  const records = readFileSync(path, "latin1")
    .split("$$$$\n")
    .filter((text) => text.trim() !== "")
    .map((text) => text.split("\n"));
  const atoms = Number(records[0]![3]!.slice(0, 3));
  const lineOf = (record: string[], a: number) => record[4 + a]!.trim().split(/\s+/);
  return {
    elements: Uint8Array.from({ length: atoms }, (_, a) => NUMBER[lineOf(records[0]!, a)[3]!]!),
    block: {
      atoms,
      count: records.length,
      positions: Float64Array.from(
        records.flatMap((record) =>
          Array.from({ length: atoms }, (_, a) => lineOf(record, a).slice(0, 3).map(Number)).flat(),
        ),
      ),
    },
    comments: records.map((record) => record[record.findIndex((line) => line.includes(`<${field}>`)) + 1]!),
  };
}

/** Graph of the first frame by the additive rule of the reference data: d <= r_i + r_j + 0.40 Å. */
export function graphOf(frames: TestFrames): Graph {
  const { elements, block } = frames;
  const p = block.positions;
  const bonds: number[] = [];
  for (let i = 0; i < block.atoms; i++) {
    for (let j = i + 1; j < block.atoms; j++) {
      const d = Math.hypot(
        p[3 * i]! - p[3 * j]!,
        p[3 * i + 1]! - p[3 * j + 1]!,
        p[3 * i + 2]! - p[3 * j + 2]!,
      );
      if (d <= RADIUS[elements[i]!]! + RADIUS[elements[j]!]! + 0.4) bonds.push(i, j);
    }
  }
  return makeGraph(elements, bonds);
}
