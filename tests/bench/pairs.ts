import { alignedRmsd } from "../../app/lib/align/kernel.ts";
import { makePlan, type SymmetryPlan } from "../../app/lib/align/plan.ts";
import { LaneRows } from "../../app/lib/align/rmsd-rows.ts";
import { writeShape } from "../../app/lib/align/shape.ts";
import { SymmetricRmsd } from "../../app/lib/align/symmetric-rmsd.ts";
import type { AtomSet } from "../../app/lib/structure.ts";
import { mulberry } from "../factories/embed.ts";
import { bruteForceRmsd, everyMapping, kabschRmsd, pointsOf } from "../factories/yardstick.ts";
import { median, processor, timed } from "./clock.ts";
import type { Molecule } from "./inputs.ts";

/** Shapes of all frames of a molecule, and pairs of them by chance. */
export class PairBench {
  readonly plan: SymmetryPlan;
  private readonly shapes: Float64Array;
  private readonly pairs: [number, number][];

  constructor(
    private readonly base: Molecule,
    private readonly atoms: AtomSet,
    options: { symmetry: boolean; pairs: number },
  ) {
    const { block, graph } = base;
    this.plan = makePlan(graph, atoms, { symmetry: options.symmetry });
    const length = this.plan.shapeLength;
    this.shapes = new Float64Array(length * block.count);
    for (let k = 0; k < block.count; k++) {
      writeShape(this.plan, block.positions, 3 * block.atoms * k, this.shapes, length * k);
    }
    const random = mulberry(7);
    const any = () => Math.floor(block.count * random());
    this.pairs = Array.from({ length: options.pairs }, () => [any(), any()]);
  }

  /** Seconds a pair for the exact minimum over all exchanges. */
  exact(runs: number): number {
    const comparer = new SymmetricRmsd(this.plan);
    const { shapes, pairs } = this;
    const length = this.plan.shapeLength;
    return this.each(runs, () => {
      for (const [i, j] of pairs) {
        if (!comparer.minimum(shapes, length * i, shapes, length * j).exact)
          throw new Error("Work bound met.");
      }
    });
  }

  /** Seconds a pair by index, one pair after the other in TypeScript. */
  plain(runs: number): number {
    const { shapes, pairs } = this;
    const { n, shapeLength: length } = this.plan;
    return this.each(runs, () => {
      for (const [i, j] of pairs) {
        const [x, y] = [length * i, length * j];
        alignedRmsd(shapes, x, shapes[x + 3 * n]!, shapes, y, shapes[y + 3 * n]!, n, null, n, 1);
      }
    });
  }

  /** The same in rows in WebAssembly. */
  inLanes(runs: number, kernel: WebAssembly.Module): number {
    const { shapes, base } = this;
    const { n, shapeLength: length } = this.plan;
    const { count } = base.block;
    const points = new Float64Array(3 * n * count);
    const squares = new Float64Array(count);
    for (let k = 0; k < count; k++) {
      points.set(shapes.subarray(length * k, length * k + 3 * n), 3 * n * k);
      squares[k] = shapes[length * k + 3 * n]!;
    }
    const rows = new LaneRows(kernel, { n, count, points, squares });
    const row = new Float64Array(count);
    const wanted = Math.ceil(this.pairs.length / count);
    const seconds = timed(runs, () => {
      for (let i = 0; i < wanted; i++) {
        rows.row(points.subarray(3 * n * i, 3 * n * (i + 1)), squares[i]!, 0, count, row);
      }
    });
    return median(seconds) / (wanted * count);
  }

  private each(runs: number, work: () => void): number {
    return median(timed(runs, work)) / this.pairs.length;
  }

  private points(frame: number): number[][] {
    const { block } = this.base;
    return pointsOf(block.positions, frame, block.atoms, this.plan.atoms);
  }

  /** Seconds a pair of the yardstick: SVD, brute force over all mappings, scaled up from `count` alignments. */
  yardstick(count: number): number {
    let done = 0;
    let seconds = 0;
    for (const [i, j] of this.pairs) {
      const [x, y] = [this.points(i), this.points(j)];
      const from = processor();
      for (const map of everyMapping(this.plan.chain, this.plan.atoms)) {
        kabschRmsd(
          x,
          x.map((_, k) => y[map[k]!]!),
        );
        if (++done === count) break;
      }
      seconds += processor() - from;
      if (done === count) break;
    }
    return (seconds / done) * this.plan.chain.order;
  }

  /** Largest difference in RMSD^2 from brute force over all mappings, in Å^2. */
  largestError(count: number): number {
    const comparer = new SymmetricRmsd(this.plan);
    const length = this.plan.shapeLength;
    const maps = [...everyMapping(this.plan.chain, this.plan.atoms)];
    let largest = 0;
    for (const [i, j] of this.pairs.slice(0, count)) {
      const found = comparer.minimum(this.shapes, length * i, this.shapes, length * j).rmsd;
      const expected = bruteForceRmsd(this.points(i), this.points(j), maps);
      largest = Math.max(largest, Math.abs(found * found - expected * expected));
    }
    return largest;
  }

  describe(): string {
    const order = this.plan.chain.order.toLocaleString("en-GB");
    return `${this.base.name}, ${this.atoms === "all" ? "all atoms" : "heavy atoms"}, ${order} mappings`;
  }
}
