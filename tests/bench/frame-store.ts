import type { FrameBlock } from "../../app/lib/structure.ts";

/** Coordinates of a stream of frames in one array, so that memory holds them once. */
export class FrameStore {
  private positions = new Float64Array(0);
  private atoms = 0;
  private count = 0;

  /** @param share of the source that was read when the first frames came: tells how many will come */
  add(positions: Float64Array, share: number): void {
    if (this.count === 0) this.atoms = positions.length / 3;
    const at = this.count * positions.length;
    if (at + positions.length > this.positions.length) {
      const expected = Math.ceil((1.02 * (this.count + 64)) / Math.max(share, 1e-6));
      const frames = this.count === 0 ? Math.min(expected, 100_000) : Math.ceil(1.2 * this.count);
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
