/**
 * The orthographic camera of the view: a rotation about the middle of the figure, a zoom and a shift. Pure, so that the
 * 3D canvas, the marks laid over it and the still picture all place an atom on the same pixel.
 * Model space in Å, right-handed; view space with x to the right, y up, z towards the reader; pixels with y down.
 */

export type Vector = readonly [number, number, number];
/** x, y, z, w with unit length. */
export type Quaternion = readonly [number, number, number, number];

export interface Camera {
  rotation: Quaternion;
  /** 1 fits the figure into its cell. */
  zoom: number;
  /** Pixels, right and down. */
  shift: readonly [number, number];
}

export const IDENTITY: Quaternion = [0, 0, 0, 1];
export const ZOOM_RANGE = [0.2, 12] as const;

/** The camera a view opens with. */
export function homeCamera(rotation: Quaternion): Camera {
  return { rotation, zoom: 1, shift: [0, 0] };
}

/** Product: first `b`, then `a`. */
export function multiply(a: Quaternion, b: Quaternion): Quaternion {
  const [ax, ay, az, aw] = a;
  const [bx, by, bz, bw] = b;
  return normalise([
    aw * bx + ax * bw + ay * bz - az * by,
    aw * by - ax * bz + ay * bw + az * bx,
    aw * bz + ax * by - ay * bx + az * bw,
    aw * bw - ax * bx - ay * by - az * bz,
  ]);
}

export function inverse([x, y, z, w]: Quaternion): Quaternion {
  return [-x, -y, -z, w];
}

/** Turns a vector: v + 2 w (u × v) + 2 u × (u × v). */
export function rotate([x, y, z, w]: Quaternion, [a, b, c]: Vector): Vector {
  const tx = 2 * (y * c - z * b);
  const ty = 2 * (z * a - x * c);
  const tz = 2 * (x * b - y * a);
  return [a + w * tx + y * tz - z * ty, b + w * ty + z * tx - x * tz, c + w * tz + x * ty - y * tx];
}

/** Rotation by an angle in radians about an axis of any length above zero. */
export function aboutAxis([x, y, z]: Vector, radians: number): Quaternion {
  const length = Math.hypot(x, y, z);
  if (length === 0) return IDENTITY;
  const s = Math.sin(radians / 2) / length;
  return [x * s, y * s, z * s, Math.cos(radians / 2)];
}

/** Turns the figure as if a ball of `radius` pixels were pushed by a pointer. */
export function turnByDrag(camera: Camera, dx: number, dy: number, radius: number): Camera {
  const distance = Math.hypot(dx, dy);
  if (distance === 0) return camera;
  const turn = aboutAxis([dy, dx, 0], distance / Math.max(40, radius));
  return { ...camera, rotation: multiply(turn, camera.rotation) };
}

/** Zooms by a factor; a point under the pointer, in pixels from the middle of its cell, stays where it is. */
export function zoomBy(camera: Camera, factor: number, at: readonly [number, number] = [0, 0]): Camera {
  const zoom = Math.min(ZOOM_RANGE[1], Math.max(ZOOM_RANGE[0], camera.zoom * factor));
  const real = zoom / camera.zoom;
  return {
    ...camera,
    zoom,
    shift: [at[0] + (camera.shift[0] - at[0]) * real, at[1] + (camera.shift[1] - at[1]) * real],
  };
}

/**
 * The rotation that shows the widest face. Towards the reader points the axis along which bonds and atoms extend least
 * (smallest principal axis of the bond vectors and the positions together: positions alone may show a ring from its
 * edge), to the right the direction of largest extent across it. Axes have no sign of their own: the first atom goes
 * left, and up is where hetero atoms are, so that the answer does not hang on how the file happened to be turned.
 *
 * @param points packed x, y, z of the atoms that count
 * @param bonds flat pairs of those atoms
 * @param hetero true for atoms that pull upwards
 */
export function widestFace(
  points: ArrayLike<number>,
  bonds: ArrayLike<number>,
  hetero: (point: number) => boolean,
): Quaternion {
  const count = Math.floor(points.length / 3);
  if (count < 2) return IDENTITY;
  const middle = centroid(points);
  const at = (k: number): Vector => [
    points[3 * k]! - middle[0],
    points[3 * k + 1]! - middle[1],
    points[3 * k + 2]! - middle[2],
  ];
  const places = Array.from({ length: count }, (_, k) => at(k));
  const ways: Vector[] = [];
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a, b] = [places[bonds[k]!]!, places[bonds[k + 1]!]!];
    ways.push([b[0] - a[0], b[1] - a[1], b[2] - a[2]]);
  }
  const extent = tensor(places);
  const course = ways.length > 0 ? tensor(ways) : extent;
  const z = symmetricAxes(course.map((value, k) => value + extent[k]!))[2];
  // Largest extent across z: what lies along z is taken out before the axes are sought again.
  const flat = tensor(places.map((place) => across(place, z)));
  const widest = across(symmetricAxes(flat)[0], z);
  const x = facing(unit(widest), -dot(places[0]!, widest));
  const height = cross(z, x);
  let up = 0;
  let skew = 0;
  places.forEach((place, k) => {
    const above = dot(place, height);
    if (hetero(k)) up += above;
    skew += above ** 3;
  });
  const y = facing(height, Math.abs(up) > 1e-6 ? up : skew);
  return fromRows(x, y, cross(x, y));
}

/** Sum of outer products, scaled to trace 1. */
function tensor(vectors: readonly Vector[]): Float64Array {
  const sum = new Float64Array(9);
  for (const v of vectors)
    for (let i = 0; i < 3; i++) for (let j = 0; j < 3; j++) sum[3 * i + j]! += v[i]! * v[j]!;
  const trace = sum[0]! + sum[4]! + sum[8]!;
  return trace > 0 ? sum.map((value) => value / trace) : sum;
}

function across(v: Vector, axis: Vector): Vector {
  const along = dot(v, axis);
  return [v[0] - along * axis[0], v[1] - along * axis[1], v[2] - along * axis[2]];
}

function unit(v: Vector): Vector {
  const length = Math.hypot(v[0], v[1], v[2]);
  return [v[0] / length, v[1] / length, v[2] / length];
}

/** Middle of packed points; the origin for none. */
export function centroid(points: ArrayLike<number>): Vector {
  const sum: [number, number, number] = [0, 0, 0];
  const count = Math.floor(points.length / 3);
  for (let k = 0; k < count; k++) for (let i = 0; i < 3; i++) sum[i]! += points[3 * k + i]! / count;
  return sum;
}

function normalise([x, y, z, w]: Quaternion): Quaternion {
  const length = Math.hypot(x, y, z, w);
  return [x / length, y / length, z / length, w / length];
}

function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

function cross(a: Vector, b: Vector): Vector {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}

function facing(axis: Vector, sign: number): Vector {
  return sign < 0 ? [-axis[0], -axis[1], -axis[2]] : axis;
}

const PAIRS = [
  [0, 1],
  [0, 2],
  [1, 2],
] as const;

/** Eigenvectors of a symmetric 3x3 matrix, largest eigenvalue first, by Jacobi rotations. */
function symmetricAxes(matrix: Float64Array): [Vector, Vector, Vector] {
  const a = Float64Array.from(matrix);
  const v = Float64Array.of(1, 0, 0, 0, 1, 0, 0, 0, 1);
  for (let sweep = 0; sweep < 30; sweep++) {
    for (const [p, q] of PAIRS) {
      const off = a[3 * p + q]!;
      if (Math.abs(off) < 1e-14 * (a[0]! + a[4]! + a[8]!)) continue;
      const theta = (a[4 * q]! - a[4 * p]!) / (2 * off);
      const t = (theta >= 0 ? 1 : -1) / (Math.abs(theta) + Math.sqrt(theta * theta + 1));
      const c = 1 / Math.sqrt(t * t + 1);
      for (let k = 0; k < 3; k++) turnPair(a, 3 * k + p, 3 * k + q, c, t * c);
      for (let k = 0; k < 3; k++) turnPair(a, 3 * p + k, 3 * q + k, c, t * c);
      for (let k = 0; k < 3; k++) turnPair(v, 3 * k + p, 3 * k + q, c, t * c);
    }
  }
  const order = [0, 1, 2].sort((i, j) => a[4 * j]! - a[4 * i]!);
  const column = (k: number): Vector => [v[k]!, v[3 + k]!, v[6 + k]!];
  return [column(order[0]!), column(order[1]!), column(order[2]!)];
}

function turnPair(m: Float64Array, i: number, j: number, c: number, s: number): void {
  const x = m[i]!;
  const y = m[j]!;
  m[i] = c * x - s * y;
  m[j] = s * x + c * y;
}

/** Quaternion of the rotation whose matrix has these rows (orthonormal, right-handed). */
function fromRows(x: Vector, y: Vector, z: Vector): Quaternion {
  const trace = x[0] + y[1] + z[2];
  if (trace > 0) {
    const s = 2 * Math.sqrt(1 + trace);
    return normalise([(z[1] - y[2]) / s, (x[2] - z[0]) / s, (y[0] - x[1]) / s, s / 4]);
  }
  if (x[0] > y[1] && x[0] > z[2]) {
    const s = 2 * Math.sqrt(1 + x[0] - y[1] - z[2]);
    return normalise([s / 4, (x[1] + y[0]) / s, (x[2] + z[0]) / s, (z[1] - y[2]) / s]);
  }
  if (y[1] > z[2]) {
    const s = 2 * Math.sqrt(1 + y[1] - x[0] - z[2]);
    return normalise([(x[1] + y[0]) / s, s / 4, (y[2] + z[1]) / s, (x[2] - z[0]) / s]);
  }
  const s = 2 * Math.sqrt(1 + z[2] - x[0] - y[1]);
  return normalise([(x[2] + z[0]) / s, (y[2] + z[1]) / s, s / 4, (y[0] - x[1]) / s]);
}
