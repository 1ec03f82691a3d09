import { fold } from "../chem/refine.ts";

/**
 * Finds frames whose coordinates repeat an earlier frame's to the last bit. Keeps 53 bits of hash a frame: among
 * 50,000 frames two different ones share them with a chance of one in ten million.
 */
export class CopyFinder {
  private readonly seen = new Map<number, number>();

  /**
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
    const key = (high >>> 11) * 2 ** 32 + (low >>> 0);
    const first = this.seen.get(key);
    if (first !== undefined) return first;
    this.seen.set(key, frame);
    return null;
  }
}
