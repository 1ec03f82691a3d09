import { fold } from "../chem/refine.ts";

/**
 * Finds frames whose coordinates repeat an earlier frame's to the last bit. Keeps 53 bits of hash a frame: among
 * 50,000 frames two different ones share them with a chance of one in ten million.
 */
export class CopyFinder {
  /** Open table of hashes and the frames that had them first, 0 where a place is free. A Map would box every hash. */
  private hashes = new Float64Array(1024);
  private frames = new Int32Array(1024);
  private count = 0;

  /**
   * @param frame above 0
   * @param shape number of the sequence of elements
   * @param energy energy or comment energy as written, where there is one: part of what has to agree
   * @returns the first frame with the same content, or null
   */
  find(frame: number, shape: number, positions: Float64Array, energy: string | null): number | null {
    const words = new Uint32Array(positions.buffer, positions.byteOffset, 2 * positions.length);
    let high = fold(3, shape);
    let low = fold(5, shape);
    for (let k = 0; k < words.length; k++) {
      high = Math.imul(high ^ words[k]!, 0x9e3779b1);
      high ^= high >>> 15;
      low = Math.imul(low ^ words[k]!, 0x85ebca77);
      low ^= low >>> 13;
    }
    for (let k = 0; k < (energy?.length ?? 0); k++) {
      high = fold(high, energy!.charCodeAt(k));
      low = fold(low, energy!.charCodeAt(k) + 7);
    }
    const hash = (high >>> 11) * 2 ** 32 + (low >>> 0);
    const at = this.placeOf(hash);
    if (this.frames[at] !== 0) return this.frames[at]!;
    this.hashes[at] = hash;
    this.frames[at] = frame;
    this.count += 1;
    if (2 * this.count > this.frames.length) this.grow();
    return null;
  }

  /** Where a hash stands, or the free place where it belongs. */
  private placeOf(hash: number): number {
    const { hashes, frames } = this;
    const last = frames.length - 1;
    let at = hash % frames.length;
    while (frames[at] !== 0 && hashes[at] !== hash) at = (at + 1) & last;
    return at;
  }

  private grow(): void {
    const { hashes, frames } = this;
    this.hashes = new Float64Array(2 * hashes.length);
    this.frames = new Int32Array(2 * frames.length);
    for (let k = 0; k < frames.length; k++) {
      if (frames[k] === 0) continue;
      const at = this.placeOf(hashes[k]!);
      this.hashes[at] = hashes[k]!;
      this.frames[at] = frames[k]!;
    }
  }
}
