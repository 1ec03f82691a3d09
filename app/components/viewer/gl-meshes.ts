import type { Figure, Scene } from "~/lib/view/scene";
import { END_CODE, LAYER_CODE, LINE_FRAGMENT, LINE_VERTEX, STICK_FRAGMENT, STICK_VERTEX } from "./gl-shaders";
import {
  atomToken,
  BALL_RADIUS,
  isBall,
  layerOf,
  lineOpacity,
  lineWidth,
  mixed,
  type Palette,
  type Rgb,
  stickRadius,
} from "./look";

/** Meshes of lines and sticks in the form in which 3dmol's renderer takes them. */

interface Group {
  vertexArray: Float32Array;
  normalArray: Float32Array;
  colorArray: Float32Array;
  radiusArray: Float32Array;
  faceArray: Uint16Array;
  lineArray: Uint16Array;
  vertices: number;
  faceidx: number;
  __inittedArrays: boolean;
}
export interface Geometry {
  addGeoGroup(): Group;
  dispose(): void;
}
export interface Material {
  shaderID: string;
  vertexShader: string;
  fragmentShader: string;
  uniforms: Record<string, { type: string; value: unknown }>;
  side: number;
}
export interface Mesh {
  geometry: Geometry;
  material: Material;
  position: { set(x: number, y: number, z: number): void };
}
/** Constructors of the library's renderer, which it does not export. */
export interface Kit {
  mesh: new (geometry: Geometry, material: Material) => Mesh;
  geometry: new (mesh: boolean, radii: boolean) => Geometry;
  material: new (values: object) => Material;
}

function newMaterial(kit: Kit, vertex: string, fragment: string, uniforms: Material["uniforms"]): Material {
  const material = new kit.material({});
  // Without an id the renderer takes the shaders and uniforms that the material carries.
  material.shaderID = "";
  material.vertexShader = vertex;
  material.fragmentShader = fragment;
  material.side = 2;
  material.uniforms = {
    opacity: { type: "f", value: 1 },
    fogColor: { type: "c", value: { r: 1, g: 1, b: 1 } },
    fogNear: { type: "f", value: 1 },
    fogFar: { type: "f", value: 2 },
    ...uniforms,
  };
  return material;
}

/** @param back Å by which what is drawn so gives way to what lies as far from the reader */
export function stickMaterial(kit: Kit, casing: number, [r, g, b]: Rgb, back: number): Material {
  return newMaterial(kit, STICK_VERTEX, STICK_FRAGMENT, {
    back: { type: "f", value: back },
    casing: { type: "f", value: casing },
    casingColor: { type: "c", value: { r, g, b } },
  });
}

/** Of all lines of a view; how thick they are drawn is set with every picture. */
export function lineMaterial(kit: Kit): Material {
  return newMaterial(kit, LINE_VERTEX, LINE_FRAGMENT, { thickness: { type: "f", value: 1 } });
}

/** Coloured segments: 3 + 3 + 3 + 1 numbers each (from, to, colour, radius or code). */
export interface Segments {
  count: number;
  numbers: Float32Array;
}
/** A group is indexed by 16 bits; four vertices a segment. */
const SEGMENTS_A_GROUP = 16_000;
const STRIDE = 10;

class SegmentWriter implements Segments {
  count = 0;
  numbers: Float32Array;
  constructor(most: number) {
    this.numbers = new Float32Array(most * STRIDE);
  }
  add(
    ax: number,
    ay: number,
    az: number,
    bx: number,
    by: number,
    bz: number,
    colour: Rgb,
    radius: number,
  ): void {
    this.numbers.set([ax, ay, az, bx, by, bz, colour[0], colour[1], colour[2], radius], this.count * STRIDE);
    this.count++;
  }
}

export function faintLines(scene: Scene, palette: Palette): Segments {
  const most = scene.faint.reduce((sum, { bonds }) => sum + bonds.length / 2, 0);
  const writer = new SegmentWriter(most);
  for (const { positions: p, bonds, step, held } of scene.faint) {
    const tint = held
      ? palette["held-edge"].rgb
      : step === null
        ? palette.edge.rgb
        : palette[`depth-${step}`].rgb;
    const colour = mixed(palette.view.rgb, tint, lineOpacity(step, scene.faint.length + scene.strong.length));
    const code = (step ?? 0) * LAYER_CODE + lineWidth(step) / 2;
    for (let k = 0; k + 1 < bonds.length; k += 2) {
      const i = 3 * (bonds[k] ?? 0);
      const j = 3 * (bonds[k + 1] ?? 0);
      writer.add(
        p[i] ?? 0,
        p[i + 1] ?? 0,
        p[i + 2] ?? 0,
        p[j] ?? 0,
        p[j + 1] ?? 0,
        p[j + 2] ?? 0,
        colour,
        code,
      );
    }
  }
  return writer;
}

export function strongSticks(scene: Scene, figure: Figure, place: number, palette: Palette): Segments {
  const { positions: p, bonds } = figure;
  const writer = new SegmentWriter(bonds.length + scene.shown.length);
  const z = (atom: number) => scene.elements[atom] ?? 0;
  const rgb = (atom: number) => mixed(palette.view.rgb, palette[atomToken(z(atom))].rgb, own);
  const { slim, slimBall, wider, own } = layerOf(
    scene.mode === "overlay" ? place : 0,
    scene.faint.length > 0,
  );
  const bonded = new Set<number>(bonds);
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a, b] = [bonds[k] ?? 0, bonds[k + 1] ?? 0];
    const [i, j] = [3 * a, 3 * b];
    const radius = slim * stickRadius(z(a), z(b)) + wider;
    const from = [p[i] ?? 0, p[i + 1] ?? 0, p[i + 2] ?? 0] as const;
    const to = [p[j] ?? 0, p[j + 1] ?? 0, p[j + 2] ?? 0] as const;
    const half = [(from[0] + to[0]) / 2, (from[1] + to[1]) / 2, (from[2] + to[2]) / 2] as const;
    if (atomToken(z(a)) === atomToken(z(b))) writer.add(...from, ...to, rgb(a), radius);
    else {
      writer.add(...from, ...half, rgb(a), radius);
      writer.add(...to, ...half, rgb(b), radius);
    }
  }
  for (const atom of scene.shown) {
    if (!isBall(z(atom)) && bonded.has(atom)) continue;
    const at = [p[3 * atom] ?? 0, p[3 * atom + 1] ?? 0, p[3 * atom + 2] ?? 0] as const;
    writer.add(...at, ...at, rgb(atom), slimBall * BALL_RADIUS + wider);
  }
  return writer;
}

export function geometryOf(kit: Kit, segments: Segments): Geometry {
  const geometry = new kit.geometry(true, true);
  for (let start = 0; start < segments.count; start += SEGMENTS_A_GROUP) {
    fillGroup(geometry.addGeoGroup(), segments, start, Math.min(segments.count, start + SEGMENTS_A_GROUP));
  }
  return geometry;
}

function fillGroup(group: Group, { numbers }: Segments, start: number, end: number): void {
  const count = end - start;
  const [own, other, colours] = [0, 0, 0].map(() => new Float32Array(12 * count)) as [
    Float32Array,
    Float32Array,
    Float32Array,
  ];
  const radii = new Float32Array(4 * count);
  const faces = new Uint16Array(6 * count);
  for (let k = 0; k < count; k++) {
    const s = (start + k) * STRIDE;
    const radius = numbers[s + 9] ?? 0;
    for (let corner = 0; corner < 4; corner++) {
      const second = corner >= 2;
      for (let i = 0; i < 3; i++) {
        const v = 12 * k + 3 * corner + i;
        own[v] = numbers[second ? s + 3 + i : s + i] ?? 0;
        other[v] = numbers[second ? s + i : s + 3 + i] ?? 0;
        colours[v] = numbers[s + 6 + i] ?? 0;
      }
      const side = corner === 0 || corner === 3 ? 1 : -1;
      radii[4 * k + corner] = side * (radius + (second ? END_CODE : 0));
    }
    faces.set([4 * k, 4 * k + 1, 4 * k + 2, 4 * k + 2, 4 * k + 3, 4 * k], 6 * k);
  }
  group.vertexArray = own;
  group.normalArray = other;
  group.colorArray = colours;
  group.radiusArray = radii;
  group.faceArray = faces;
  group.lineArray = new Uint16Array(0);
  group.vertices = 4 * count;
  group.faceidx = 6 * count;
  group.__inittedArrays = true;
}
