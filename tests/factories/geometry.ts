import fc from "fast-check";

/** Points, rotations and small molecules for tests, in Å and degrees. */

export type Vector = [number, number, number];

export const degrees = Math.PI / 180;

/** Where an atom goes that is `length` from c, at `angle` to b-c and at `torsion` about it seen from a. */
export function placed(
  a: Vector,
  b: Vector,
  c: Vector,
  length: number,
  angle: number,
  torsion: number,
): Vector {
  const u = unit(minus(c, b));
  const n = unit(cross(minus(b, a), u));
  const m = cross(n, u);
  const x = -length * Math.cos(angle * degrees);
  const y = length * Math.sin(angle * degrees) * Math.cos(torsion * degrees);
  const z = length * Math.sin(angle * degrees) * Math.sin(torsion * degrees);
  return [0, 1, 2].map((k) => c[k]! + x * u[k]! + y * m[k]! + z * n[k]!) as Vector;
}

/** C1-C2-C3-C4 with C-C 1.53 Å and angles of 112 degrees. */
export function c4Skeleton(torsion: number): Vector[] {
  const chain: Vector[] = [placed([0, 1, 0], [2, 0, 0], [0, 0, 0], 1.53, 112, 180)];
  chain.push([0, 0, 0], [1.53, 0, 0]);
  chain.push(placed(chain[0]!, chain[1]!, chain[2]!, 1.53, 112, torsion));
  return chain;
}

/** n-Alkane: carbons first, then the hydrogens of each in turn; `torsions[i]` turns carbon i + 3 (and the methyl ends). */
export function alkane(carbons: number, torsions: readonly number[]): Vector[] {
  const c: Vector[] = [
    [0, 0, 0],
    [1.53, 0, 0],
  ];
  c.push(placed([0, 1, 0], c[0]!, c[1]!, 1.53, 112, 0));
  for (let i = 3; i < carbons; i++)
    c.push(placed(c[i - 3]!, c[i - 2]!, c[i - 1]!, 1.53, 112, torsions[i - 3]!));
  const hydrogens: Vector[] = [];
  for (let i = 0; i < carbons; i++) {
    const [near, far] = i === 0 ? [1, 2] : [i - 1, i - 2];
    if (i === 0 || i === carbons - 1) {
      for (const t of [60, 180, 300]) hydrogens.push(placed(c[far]!, c[near]!, c[i]!, 1.09, 111, t));
      continue;
    }
    const u = unit(minus(c[i - 1]!, c[i]!));
    const v = unit(minus(c[i + 1]!, c[i]!));
    const out = unit([-u[0] - v[0], -u[1] - v[1], -u[2] - v[2]]);
    const side = unit(cross(u, v));
    for (const s of [1, -1]) {
      const h = [0, 1, 2].map(
        (k) => c[i]![k]! + 1.09 * (Math.cos(53 * degrees) * out[k]! + s * Math.sin(53 * degrees) * side[k]!),
      );
      hydrogens.push(h as Vector);
    }
  }
  return [...c, ...hydrogens];
}

export function alkaneBonds(carbons: number): [number, number][] {
  const bonds: [number, number][] = [];
  for (let i = 0; i + 1 < carbons; i++) bonds.push([i, i + 1]);
  let next = carbons;
  for (let i = 0; i < carbons; i++) {
    for (let k = 0; k < (i === 0 || i === carbons - 1 ? 3 : 2); k++) bonds.push([i, next++]);
  }
  return bonds;
}

/** Rotation matrix of a quaternion (any length but 0). */
export function rotation(q: readonly number[]): number[][] {
  const s = Math.hypot(...q);
  const [w, x, y, z] = q.map((v) => v / s) as [number, number, number, number];
  return [
    [w * w + x * x - y * y - z * z, 2 * (x * y - w * z), 2 * (x * z + w * y)],
    [2 * (x * y + w * z), w * w - x * x + y * y - z * z, 2 * (y * z - w * x)],
    [2 * (x * z - w * y), 2 * (y * z + w * x), w * w - x * x - y * y + z * z],
  ];
}

export function moved(points: readonly (readonly number[])[], motion: Motion): number[][] {
  const r = rotation(motion.quaternion);
  return points.map((p) =>
    r.map((row, i) => row.reduce((s, value, k) => s + value * p[k]!, 0) + motion.shift[i]!),
  );
}

export interface Motion {
  quaternion: number[];
  shift: number[];
}

/** As in a file with three decimals: what lies between is finer than any structure is known. */
const coordinate = (limit: number) =>
  fc.integer({ min: -1000 * limit, max: 1000 * limit }).map((v) => v / 1000);

export const motions: fc.Arbitrary<Motion> = fc.record({
  quaternion: fc.array(coordinate(1), { minLength: 4, maxLength: 4 }).filter((q) => Math.hypot(...q) > 0.1),
  shift: fc.array(coordinate(50), { minLength: 3, maxLength: 3 }),
});

export function pointSets(count: number): fc.Arbitrary<number[][]> {
  return fc.array(fc.array(coordinate(5), { minLength: 3, maxLength: 3 }), {
    minLength: count,
    maxLength: count,
  });
}

function minus(a: Vector, b: Vector): Vector {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

function cross(a: Vector, b: Vector): Vector {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}

function unit(a: Vector): Vector {
  const length = Math.hypot(...a);
  return [a[0] / length, a[1] / length, a[2] / length];
}
