import { alignedRmsd, centreInto, covarianceInto, rotationInto } from "./kernel.ts";

export interface SuperposeOptions {
  /** Atoms that are laid on each other, three or more for a definite rotation; all when left out. */
  atoms?: Int32Array;
  /** Atom a of the fixed frame is compared with atom permutation[a] of the moving one. */
  permutation?: Int32Array;
  /** Weights of the chosen atoms, above zero. */
  weights?: ArrayLike<number>;
  /** Lays the mirror image of the moving frame on the fixed one. */
  mirror?: boolean;
}

export interface Superposed {
  /** Å, all atoms of the moving frame in their own order, in the place of the fixed frame. */
  positions: Float64Array;
  /** Å over the chosen atoms, with the weights given. */
  rmsd: number;
}

/**
 * Moves one frame onto another by the best proper rotation over chosen atoms.
 *
 * @param fixed, moving packed coordinates of one frame each, in Å
 * @throws RangeError when the frames differ in length or no atom is chosen
 * @example superpose(frameA, frameB, { atoms: Int32Array.of(0, 1, 2) }).positions
 */
export function superpose(
  fixed: Float64Array,
  moving: Float64Array,
  options: SuperposeOptions = {},
): Superposed {
  const count = fixed.length / 3;
  if (moving.length !== fixed.length) {
    throw new RangeError(`Frames of ${count} and ${moving.length / 3} atoms cannot be superposed.`);
  }
  const atoms = options.atoms ?? Int32Array.from({ length: count }, (_, a) => a);
  const n = atoms.length;
  if (n === 0) throw new RangeError("No atom to superpose on.");
  const partners = options.permutation ? atoms.map((a) => options.permutation![a]!) : atoms;
  const hand = options.mirror ? -1 : 1;
  const x = new Float64Array(3 * n);
  const y = new Float64Array(3 * n);
  const m = new Float64Array(9);
  const rotation = new Float64Array(9);
  const ex = centreInto(moving, 0, partners, x, 0, options.weights);
  const ey = centreInto(fixed, 0, atoms, y, 0, options.weights);
  covarianceInto(x, 0, y, 0, n, null, m, 0);
  if (hand < 0) for (let k = 0; k < 9; k++) m[k] = -m[k]!;
  rotationInto(m, 0, rotation);
  let total = 0;
  for (let k = 0; k < n; k++) total += options.weights ? options.weights[k]! : 1;
  const rmsd = alignedRmsd(x, 0, ex, y, 0, ey, n, null, total, hand);
  const from = centroid(moving, partners, options.weights);
  const to = centroid(fixed, atoms, options.weights);
  const positions = new Float64Array(moving.length);
  for (let i = 0; i < moving.length; i += 3) {
    for (let r = 0; r < 3; r++) {
      let sum = 0;
      for (let c = 0; c < 3; c++) sum += rotation[3 * r + c]! * (moving[i + c]! - from[c]!);
      positions[i + r] = hand * sum + to[r]!;
    }
  }
  return { positions, rmsd };
}

function centroid(positions: Float64Array, atoms: Int32Array, weights?: ArrayLike<number>): number[] {
  const sum = [0, 0, 0];
  let total = 0;
  atoms.forEach((a, k) => {
    const w = weights ? weights[k]! : 1;
    total += w;
    for (let c = 0; c < 3; c++) sum[c]! += w * positions[3 * a + c]!;
  });
  return sum.map((s) => s / total);
}
