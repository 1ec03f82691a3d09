import { alignedRmsd } from "./kernel.ts";

/**
 * RMSDs of one centred set of points to many others by index, in rows: what a pair matrix is made of. Two ways with
 * the same bytes: the plain one, and four at a time in WebAssembly.
 */
export interface RmsdRows {
  /**
   * Writes the RMSDs of x to the sets `from` to `to` - 1 to `target`, from its start on.
   *
   * @param x 3 n numbers; `ex` their sum of squares
   */
  row(x: Float64Array, ex: number, from: number, to: number, target: Float64Array): void;
}

/** Centred sets of n points, packed one after the other, and their sums of squares. */
export interface CentredSets {
  readonly n: number;
  readonly count: number;
  readonly points: Float64Array;
  readonly squares: Float64Array;
}

/** One pair after the other, by the kernel itself. */
export class PlainRows implements RmsdRows {
  constructor(private readonly sets: CentredSets) {}

  row(x: Float64Array, ex: number, from: number, to: number, target: Float64Array): void {
    const { n, points, squares } = this.sets;
    for (let j = from; j < to; j++) {
      target[j - from] = alignedRmsd(x, 0, ex, points, 3 * n * j, squares[j]!, n, null, n, 1);
    }
  }
}

interface KernelExports {
  memory: WebAssembly.Memory;
  rmsds(
    x: number,
    ex: number,
    y: number,
    ey: number,
    n: number,
    quads: number,
    total: number,
    out: number,
  ): void;
}

/** Bytes that the compiled kernel keeps for itself at the start of its memory, and a page. */
const RESERVED = 4096;
const PAGE = 65_536;
/** Sets that one call of the kernel takes on; results are given back in between. */
const QUADS_A_CALL = 256;

/**
 * Four pairs at a time in WebAssembly with SIMD. Every lane does what the plain kernel does, in the same order; the
 * few pairs that need its special cases (near linear sets, RMSD near 0) are given to it.
 *
 * @param module `new WebAssembly.Module(bytes)` of the compiled kernel
 */
export class LaneRows implements RmsdRows {
  private readonly kernel: KernelExports;
  private readonly numbers: Float64Array;
  /** Where things lie in `numbers`. */
  private readonly x: number;
  private readonly out: number;
  private readonly ey: number;
  private readonly y: number;

  constructor(
    module: WebAssembly.Module,
    private readonly sets: CentredSets,
  ) {
    const { n, count, points, squares } = sets;
    const quads = Math.ceil(count / 4);
    this.x = RESERVED / 8;
    this.out = this.x + 4 * Math.ceil((3 * n) / 4);
    this.ey = this.out + 4 * QUADS_A_CALL;
    this.y = this.ey + 4 * quads;
    const abort = () => {
      throw new Error("The compiled kernel gave up.");
    };
    const instance = new WebAssembly.Instance(module, { env: { abort } });
    this.kernel = instance.exports as unknown as KernelExports;
    const need = 8 * (this.y + 12 * n * quads) - this.kernel.memory.buffer.byteLength;
    if (need > 0) this.kernel.memory.grow(Math.ceil(need / PAGE));
    this.numbers = new Float64Array(this.kernel.memory.buffer);
    this.numbers.set(squares.subarray(0, count), this.ey);
    for (let j = 0; j < count; j++) {
      const to = this.y + 6 * n * (j >> 1) + (j & 1);
      for (let k = 0; k < 3 * n; k++) this.numbers[to + 2 * k] = points[3 * n * j + k]!;
    }
  }

  row(x: Float64Array, ex: number, from: number, to: number, target: Float64Array): void {
    const { n } = this.sets;
    this.numbers.set(x.subarray(0, 3 * n), this.x);
    for (let first = from & ~3; first < to; first += 4 * QUADS_A_CALL) {
      const quads = Math.min(QUADS_A_CALL, Math.ceil((to - first) / 4));
      const y = this.y + 3 * n * first;
      this.kernel.rmsds(8 * this.x, ex, 8 * y, 8 * (this.ey + first), n, quads, n, 8 * this.out);
      const end = Math.min(to, first + 4 * quads);
      for (let j = Math.max(from, first); j < end; j++) {
        const value = this.numbers[this.out + j - first]!;
        target[j - from] = value >= 0 ? value : this.plain(x, ex, j);
      }
    }
  }

  private plain(x: Float64Array, ex: number, j: number): number {
    const { n, points, squares } = this.sets;
    return alignedRmsd(x, 0, ex, points, 3 * n * j, squares[j]!, n, null, n, 1);
  }
}
