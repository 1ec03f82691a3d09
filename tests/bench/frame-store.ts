import type { FrameBlock } from "../../app/lib/structure.ts";

/** Coordinates of a stream of frames in one array, so that memory holds them once. */
export class FrameStore {
  private positions = new Float64Array(0);
  private atoms = 0;
  private count = 0;

  /** @param expected how many frames there may be in all */
  add(positions: Float64Array, expected: number): void {
    if (this.count === 0) this.atoms = positions.length / 3;
    const at = this.count * positions.length;
    if (at + positions.length > this.positions.length) {
      const frames = Math.ceil(Math.max(expected, 1.2 * this.count));
      const larger = new Float64Array(frames * positions.length);
      larger.set(this.positions);
      this.positions = larger;
    }
    this.positions.set(positions, at);
    this.count += 1;
  }

  /** The chosen frames, ascending, moved together in place. */
  take(rows: readonly number[]): FrameBlock {
    const stride = 3 * this.atoms;
    rows.forEach((row, k) => {
      if (row !== k) this.positions.copyWithin(k * stride, row * stride, (row + 1) * stride);
    });
    return {
      atoms: this.atoms,
      count: rows.length,
      positions: this.positions.subarray(0, rows.length * stride),
    };
  }
}
