import type { FrameBlock } from "../structure.ts";
import type { SymmetryPlan } from "./plan.ts";
import { writeShape } from "./shape.ts";
import { SymmetricRmsd } from "./symmetric-rmsd.ts";

export interface RmsdsTo {
  /** Å, symmetry-corrected, one a row asked for. */
  rmsd: Float64Array;
  /** 1 where the mirror image of the frame is the nearer one (only when asked). */
  mirror: Uint8Array;
  /** 0 where the work bound was met and the RMSD is a bound from above. */
  exact: Uint8Array;
}

/**
 * Symmetry-corrected RMSD of many frames to one of them.
 *
 * @param plan `makePlan(graph, atoms)`, made once
 * @param block coordinates; `reference` and `rows` count its frames from 0
 * @param options.mirror also look at the mirror images
 * @param options.rows which frames, all when left out; long lists can be asked for in pieces
 * @throws RangeError on a row outside the block
 * @example rmsdTo(makePlan(graph, "heavy+polarH"), block, 0).rmsd
 */
export function rmsdTo(
  plan: SymmetryPlan,
  block: FrameBlock,
  reference: number,
  options: { mirror?: boolean; rows?: Int32Array } = {},
): RmsdsTo {
  const rows = options.rows ?? Int32Array.from({ length: block.count }, (_, k) => k);
  const comparer = new SymmetricRmsd(plan);
  const x = new Float64Array(plan.shapeLength);
  const y = new Float64Array(plan.shapeLength);
  const stride = 3 * block.atoms;
  const load = (row: number, shape: Float64Array) => {
    if (!(row >= 0 && row < block.count)) throw new RangeError(`No frame ${row} among ${block.count}.`);
    writeShape(plan, block.positions, row * stride, shape, 0);
  };
  load(reference, x);
  const result: RmsdsTo = {
    rmsd: new Float64Array(rows.length),
    mirror: new Uint8Array(rows.length),
    exact: new Uint8Array(rows.length),
  };
  rows.forEach((row, k) => {
    load(row, y);
    const found = comparer.minimum(x, 0, y, 0, options.mirror ?? false);
    result.rmsd[k] = found.rmsd;
    result.mirror[k] = found.mirror ? 1 : 0;
    result.exact[k] = found.exact ? 1 : 0;
  });
  return result;
}
