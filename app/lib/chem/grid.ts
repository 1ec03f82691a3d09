/** Linked cells: every pair of points nearer than a reach, each once, in time proportional to their number. */
export class Grid {
  private readonly next: Int32Array;
  private readonly count: number;

  constructor(count: number) {
    this.count = count;
    this.next = new Int32Array(count);
  }

  pairsWithin(xyz: Float64Array, reach: number, visit: (a: number, b: number, d2: number) => void): void {
    const low = [Infinity, Infinity, Infinity];
    const high = [-Infinity, -Infinity, -Infinity];
    for (let k = 0; k < 3 * this.count; k++) {
      low[k % 3] = Math.min(low[k % 3]!, xyz[k]!);
      high[k % 3] = Math.max(high[k % 3]!, xyz[k]!);
    }
    // Molecules far apart must not make a grid of empty cells without end: cells grow until a few per atom remain.
    let side = reach;
    const cells = (axis: number): number => Math.floor((high[axis]! - low[axis]!) / side) + 1;
    while (cells(0) * cells(1) * cells(2) > 8 * this.count + 64) side *= 2;
    const nx = cells(0);
    const ny = cells(1);
    const nz = cells(2);
    const heads = new Int32Array(nx * ny * nz).fill(-1);
    const reach2 = reach * reach;
    const look = (a: number, head: number): void => {
      for (let b = head; b >= 0; b = this.next[b]!) {
        const d2 =
          (xyz[3 * a]! - xyz[3 * b]!) ** 2 +
          (xyz[3 * a + 1]! - xyz[3 * b + 1]!) ** 2 +
          (xyz[3 * a + 2]! - xyz[3 * b + 2]!) ** 2;
        if (d2 <= reach2) visit(b, a, d2);
      }
    };
    // Each atom looks at those entered before it, so that every pair is met once and as (smaller, larger).
    for (let a = 0; a < this.count; a++) {
      const cx = Math.floor((xyz[3 * a]! - low[0]!) / side);
      const cy = Math.floor((xyz[3 * a + 1]! - low[1]!) / side);
      const cz = Math.floor((xyz[3 * a + 2]! - low[2]!) / side);
      for (let x = Math.max(0, cx - 1); x <= Math.min(nx - 1, cx + 1); x++) {
        for (let y = Math.max(0, cy - 1); y <= Math.min(ny - 1, cy + 1); y++) {
          for (let z = Math.max(0, cz - 1); z <= Math.min(nz - 1, cz + 1); z++) {
            look(a, heads[(x * ny + y) * nz + z]!);
          }
        }
      }
      const own = (cx * ny + cy) * nz + cz;
      this.next[a] = heads[own]!;
      heads[own] = a;
    }
  }
}
