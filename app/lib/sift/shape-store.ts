const CHUNK = 128;

/**
 * Shapes of the kept conformers in chunks: tens of thousands of them must neither be copied on growth nor held once
 * the energy tolerance has left them behind.
 */
export class ShapeStore {
  private readonly chunks: (Float64Array | null)[] = [];
  /** A chunk that was left behind, for the next one needed: else they would pile up until memory is collected. */
  private spare: Float64Array | null = null;
  private released = 0;
  private length = 0;

  constructor(private readonly shapeLength: number) {}

  push(shape: Float64Array): void {
    const chunk = Math.floor(this.length / CHUNK);
    if (chunk === this.chunks.length) {
      this.chunks.push(this.spare ?? new Float64Array(CHUNK * this.shapeLength));
      this.spare = null;
    }
    this.chunks[chunk]!.set(shape, (this.length % CHUNK) * this.shapeLength);
    this.length += 1;
  }

  /** Array that holds shape k. */
  arrayOf(k: number): Float64Array {
    return this.chunks[Math.floor(k / CHUNK)]!;
  }

  /** Where shape k begins in it. */
  offsetOf(k: number): number {
    return (k % CHUNK) * this.shapeLength;
  }

  /** Shapes before k are not asked for again. */
  release(k: number): void {
    for (const whole = Math.floor(k / CHUNK); this.released < whole; this.released++) {
      this.spare = this.chunks[this.released] ?? null;
      this.chunks[this.released] = null;
    }
  }
}
