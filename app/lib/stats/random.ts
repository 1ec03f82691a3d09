/** Name of the one generator of the product; it stands beside every seed. */
export const GENERATOR_NAME = "xoshiro128**";

/** Numbers by chance from a stored seed: the same seed gives the same numbers everywhere. */
export interface Generator {
  /** The next 32 bits, 0 to 2^32 - 1. */
  bits(): number;
  /** Uniform in [0, 1), 53 bits. */
  uniform(): number;
  /** Uniform among 0 to n - 1, without bias. */
  below(n: number): number;
  /** Standard normal. */
  normal(): number;
}

/**
 * The generator xoshiro128** (Blackman, Vigna, ACM Trans. Math. Softw. 2021, 47, 36), its four words filled from one
 * seed by splitmix32; normal numbers by the polar method, which needs only a logarithm and a root.
 *
 * @param seed whole number from 0 to 2^32 - 1
 * @throws RangeError on any other seed
 * @example generator(412).uniform() // the same number each time
 */
export function generator(seed: number): Generator {
  if (!Number.isInteger(seed) || seed < 0 || seed > 0xffff_ffff) {
    throw new RangeError(`A seed is a whole number from 0 to 4294967295, found ${seed}.`);
  }
  let state = seed >>> 0;
  const word = () => {
    state = (state + 0x9e37_79b9) >>> 0;
    let z = state;
    z = Math.imul(z ^ (z >>> 16), 0x85eb_ca6b);
    z = Math.imul(z ^ (z >>> 13), 0xc2b2_ae35);
    return (z ^ (z >>> 16)) >>> 0;
  };
  return fromWords(word(), word(), word(), word());
}

/** The same from the four words of its state, not all zero. */
export function fromWords(w0: number, w1: number, w2: number, w3: number): Generator {
  let a = w0 | 0;
  let b = w1 | 0;
  let c = w2 | 0;
  let d = w3 | 0;
  let spare: number | null = null;
  const bits = () => {
    const five = Math.imul(b, 5);
    const result = Math.imul((five << 7) | (five >>> 25), 9) >>> 0;
    const t = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= t;
    d = (d << 11) | (d >>> 21);
    return result;
  };
  const uniform = () => ((bits() >>> 5) * 67_108_864 + (bits() >>> 6)) / 9_007_199_254_740_992;
  const below = (n: number) => {
    // Numbers of the last, incomplete run of n would come too often: draw again.
    const limit = 4_294_967_296 - (4_294_967_296 % n);
    let value = bits();
    while (value >= limit) value = bits();
    return value % n;
  };
  const normal = () => {
    if (spare !== null) {
      const value = spare;
      spare = null;
      return value;
    }
    let u = 0;
    let v = 0;
    let square = 0;
    do {
      u = 2 * uniform() - 1;
      v = 2 * uniform() - 1;
      square = u * u + v * v;
    } while (square >= 1 || square === 0);
    const scale = Math.sqrt((-2 * Math.log(square)) / square);
    spare = v * scale;
    return u * scale;
  };
  return { bits, uniform, below, normal };
}
