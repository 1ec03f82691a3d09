import { SiftCancelled, type SiftHooks } from "../sift/hooks.ts";
import type { FrameBlock } from "../structure.ts";
import { exchangesOf } from "./exchanges.ts";
import type { SymmetryPlan } from "./plan.ts";
import { type CentredSets, LaneRows, PlainRows, type RmsdRows } from "./rmsd-rows.ts";
import { writeShape } from "./shape.ts";
import { SymmetricRmsd } from "./symmetric-rmsd.ts";

/** Up to this many exchanges all are tried, one row of RMSDs for each; beyond, a search finds the best. */
const TRY_ALL_UP_TO = 24;
/** Rows and columns of a tile: its columns stay in the cache while its rows pass. */
const TILE_ROWS = 64;
const TILE_COLUMNS = 512;

export interface PairMatrixInput {
  /** `makePlan(graph, atoms)`; without symmetry where that is wanted. */
  plan: SymmetryPlan;
  block: FrameBlock;
  /** Frames of the block in the order of the matrix; all when left out. */
  rows?: Int32Array;
  /** The smaller of proper and mirror RMSD. */
  mirror?: boolean;
  /** Compiled kernel (`scripts/build-kernel.mjs`); the same bytes come out without, more slowly. */
  kernel?: WebAssembly.Module | null;
}

/** Numbers of a packed upper triangle over `count` conformers. */
export function packedLength(count: number): number {
  return count === 0 ? 0 : (count * (count - 1)) / 2;
}

/**
 * Where the pair i, j stands in a packed upper triangle: row by row, without the diagonal.
 *
 * @example packedIndex(4, 0, 1) // 0
 */
export function packedIndex(count: number, i: number, j: number): number {
  const [low, high] = i < j ? [i, j] : [j, i];
  return (low * (2 * count - low - 1)) / 2 + high - low - 1;
}

/**
 * RMSDs of all pairs of many conformers, symmetry-corrected, as a packed upper triangle of 32-bit floats, filled tile
 * by tile. Every number depends on its pair alone, and every tile writes its own places: threads may share the tiles
 * in any order, over one shared buffer, and the same bytes come out.
 *
 * @example
 * const work = new PairMatrixWork({ plan, block });
 * const matrix = new Float32Array(packedLength(work.count));
 * for (let tile = 0; tile < work.tiles; tile++) work.fill(tile, matrix);
 * matrix[packedIndex(work.count, 3, 7)] // Å
 */
export class PairMatrixWork {
  /** Conformers, and tiles that cover their pairs. */
  readonly count: number;
  readonly tiles: number;
  /** Pairs filled here whose work bound was met: their numbers are bounds from above. */
  inexact = 0;
  private readonly corners: Int32Array;
  private readonly fillRow: (i: number, from: number, to: number, hooks: SiftHooks) => void;
  private readonly row = new Float64Array(TILE_COLUMNS);

  /** @throws RangeError on a row outside the block */
  constructor(private readonly input: PairMatrixInput) {
    const { plan, block } = input;
    this.count = input.rows?.length ?? block.count;
    this.corners = cornersOf(this.count);
    this.tiles = this.corners.length / 2;
    const tryAll = plan.chain.complete && plan.chain.order <= TRY_ALL_UP_TO;
    this.fillRow = tryAll ? this.byTrying() : this.bySearch();
  }

  /**
   * Fills one tile.
   *
   * @param target the packed upper triangle, as long as `packedLength(count)`
   * @throws SiftCancelled when `hooks.cancelled` says so
   * @throws RangeError on a tile that is not there, or a target of another length
   */
  fill(tile: number, target: Float32Array, hooks: SiftHooks = {}): void {
    if (!(tile >= 0 && tile < this.tiles)) throw new RangeError(`No tile ${tile} among ${this.tiles}.`);
    if (target.length !== packedLength(this.count)) {
      throw new RangeError(`${target.length} places for ${packedLength(this.count)} pairs.`);
    }
    const top = this.corners[2 * tile]!;
    const left = this.corners[2 * tile + 1]!;
    const right = Math.min(left + TILE_COLUMNS, this.count);
    for (let i = top; i < Math.min(top + TILE_ROWS, right - 1); i++) {
      if (hooks.cancelled?.()) throw new SiftCancelled();
      const from = Math.max(left, i + 1);
      this.fillRow(i, from, right, hooks);
      const to = packedIndex(this.count, i, from);
      for (let j = from; j < right; j++) target[to + j - from] = this.row[j - from]!;
    }
  }

  /** Pairs that a tile covers. */
  pairsIn(tile: number): number {
    const top = this.corners[2 * tile]!;
    const left = this.corners[2 * tile + 1]!;
    const right = Math.min(left + TILE_COLUMNS, this.count);
    let pairs = 0;
    for (let i = top; i < Math.min(top + TILE_ROWS, right - 1); i++) pairs += right - Math.max(left, i + 1);
    return pairs;
  }

  private frameOf(k: number): number {
    const { rows, block } = this.input;
    const row = rows ? rows[k]! : k;
    if (!(row >= 0 && row < block.count)) throw new RangeError(`No frame ${row} among ${block.count}.`);
    return 3 * block.atoms * row;
  }

  /** Every exchange, and hand where asked: a row of RMSDs for each, the least of them counts. */
  private byTrying(): (i: number, from: number, to: number) => void {
    const { plan, block, mirror, kernel } = this.input;
    const { n } = plan;
    const sets: CentredSets = {
      n,
      count: this.count,
      points: new Float64Array(3 * n * this.count),
      squares: new Float64Array(this.count),
    };
    const shape = new Float64Array(plan.shapeLength);
    for (let k = 0; k < this.count; k++) {
      writeShape(plan, block.positions, this.frameOf(k), shape, 0);
      sets.points.set(shape.subarray(0, 3 * n), 3 * n * k);
      sets.squares[k] = shape[3 * n]!;
    }
    const source: RmsdRows = kernel ? new LaneRows(kernel, sets) : new PlainRows(sets);
    const exchanges = exchangesOf(plan);
    const hands = mirror ? [1, -1] : [1];
    const x = new Float64Array(3 * n);
    const least = this.row;
    const other = new Float64Array(TILE_COLUMNS);
    return (i, from, to) => {
      const at = 3 * n * i;
      exchanges.forEach((exchange, e) => {
        for (const hand of hands) {
          for (let k = 0; k < n; k++) {
            const image = 3 * exchange[k]!;
            for (let c = 0; c < 3; c++) x[image + c] = hand * sets.points[at + 3 * k + c]!;
          }
          const first = e === 0 && hand > 0;
          source.row(x, sets.squares[i]!, from, to, first ? least : other);
          if (first) continue;
          for (let j = 0; j < to - from; j++) if (other[j]! < least[j]!) least[j] = other[j]!;
        }
      });
    };
  }

  private bySearch(): (i: number, from: number, to: number, hooks: SiftHooks) => void {
    const { plan, block } = this.input;
    const length = plan.shapeLength;
    const shapes = new Float64Array(length * this.count);
    for (let k = 0; k < this.count; k++) {
      writeShape(plan, block.positions, this.frameOf(k), shapes, length * k);
    }
    const comparer = new SymmetricRmsd(plan);
    const mirror = this.input.mirror ?? false;
    return (i, from, to, hooks) => {
      const look = () => {
        if (hooks.cancelled?.()) throw new SiftCancelled();
      };
      comparer.interrupt = look;
      for (let j = from; j < to; j++) {
        look();
        const found = comparer.minimum(shapes, length * i, shapes, length * j, mirror);
        if (!found.exact) this.inexact += 1;
        this.row[j - from] = found.rmsd;
      }
    };
  }
}

/** First row and column of every tile that holds a pair, row by row. */
function cornersOf(count: number): Int32Array {
  const corners: number[] = [];
  for (let top = 0; top < count - 1; top += TILE_ROWS) {
    const first = Math.floor((top + 1) / TILE_COLUMNS) * TILE_COLUMNS;
    for (let left = first; left < count; left += TILE_COLUMNS) corners.push(top, left);
  }
  return Int32Array.from(corners);
}

/**
 * The whole matrix in one thread.
 *
 * @throws as `PairMatrixWork`
 * @example pairMatrix({ plan: makePlan(graph, "heavy"), block }).matrix
 */
export function pairMatrix(
  input: PairMatrixInput,
  hooks: SiftHooks = {},
): { matrix: Float32Array; inexact: number } {
  const work = new PairMatrixWork(input);
  const matrix = new Float32Array(packedLength(work.count));
  for (let tile = 0; tile < work.tiles; tile++) {
    hooks.progress?.(tile / work.tiles);
    work.fill(tile, matrix, hooks);
  }
  hooks.progress?.(1);
  return { matrix, inexact: work.inexact };
}

export interface Neighbours {
  /** count x k: for each conformer the nearest others, the nearest first; of equal ones the lower number. */
  numbers: Int32Array;
  /** Their RMSDs in Å, in the same places. */
  rmsds: Float32Array;
  /** min(k asked for, count - 1). */
  k: number;
}

/**
 * Nearest neighbours of every conformer of a packed matrix.
 *
 * @throws RangeError where the matrix is not that of `count` conformers, or k is not a whole number above 0
 * @example nearestNeighbours(matrix, count, 5).numbers.subarray(0, 5) // of the first
 */
export function nearestNeighbours(matrix: Float32Array, count: number, k: number): Neighbours {
  if (matrix.length !== packedLength(count)) {
    throw new RangeError(`${matrix.length} RMSDs are not the pairs of ${count} conformers.`);
  }
  if (!(Number.isInteger(k) && k > 0)) throw new RangeError(`${k} nearest neighbours cannot be listed.`);
  const width = Math.min(k, Math.max(0, count - 1));
  const numbers = new Int32Array(width * count);
  const rmsds = new Float32Array(width * count);
  const filled = new Int32Array(count);
  const offer = (i: number, j: number, rmsd: number): void => {
    const start = width * i;
    let at = filled[i]!;
    if (at === width) {
      if (rmsd >= rmsds[start + width - 1]!) return;
      at -= 1;
    } else filled[i] = at + 1;
    // Others come in rising order, so that an equal one stands behind.
    while (at > 0 && rmsds[start + at - 1]! > rmsd) {
      rmsds[start + at] = rmsds[start + at - 1]!;
      numbers[start + at] = numbers[start + at - 1]!;
      at -= 1;
    }
    rmsds[start + at] = rmsd;
    numbers[start + at] = j;
  };
  let next = 0;
  for (let i = 0; i < count; i++) {
    for (let j = i + 1; j < count; j++) {
      const rmsd = matrix[next++]!;
      offer(i, j, rmsd);
      offer(j, i, rmsd);
    }
  }
  return { numbers, rmsds, k: width };
}
