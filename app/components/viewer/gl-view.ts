import type { Camera } from "~/lib/view/camera";
import { inverse, rotate } from "~/lib/view/camera";
import type { Figure, Scene } from "~/lib/view/scene";
import { cellOf, type Stage } from "~/lib/view/stage";
import { END_CODE, LAYER_CODE, LINE_FRAGMENT, LINE_VERTEX, STICK_FRAGMENT, STICK_VERTEX } from "./gl-shaders";
import {
  atomToken,
  BALL_RADIUS,
  isBall,
  lineOpacity,
  lineShare,
  lineWidth,
  mixed,
  type Palette,
  type Rgb,
  stickRadius,
} from "./look";

/**
 * The molecules on a WebGL canvas, drawn by 3dmol's renderer: one mesh of lines for all conformers in their tint, one
 * of sticks for each in atom colours. The library's models are not used: rebuilding one for 500 conformers takes 150 to
 * 250 ms, writing these arrays some milliseconds, and a temperature slider has to be followed.
 *
 * What is used of the library beyond its public interface is listed in `Internals`; its version is pinned.
 */

type Library = typeof import("3dmol");

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
interface Geometry {
  addGeoGroup(): Group;
  dispose(): void;
}
interface Material {
  shaderID: string;
  vertexShader: string;
  fragmentShader: string;
  uniforms: Record<string, { type: string; value: unknown }>;
  side: number;
}
interface Mesh {
  geometry: Geometry;
  material: Material;
  position: { set(x: number, y: number, z: number): void };
}
interface Internals {
  renderer: {
    devicePixelRatio: number;
    domElement: HTMLCanvasElement;
    /** Of the canvas, or of one off the screen whose pictures are handed to it. */
    getContext(): WebGL2RenderingContext | null;
    supportedExtensions(): unknown;
    isWebGL1(): boolean;
  };
  modelGroup: { add(mesh: Mesh): void; remove(mesh: Mesh): void };
  divwatcher?: ResizeObserver;
  intwatcher?: IntersectionObserver;
}
interface Kit {
  mesh: new (geometry: Geometry, material: Material) => Mesh;
  geometry: new (mesh: boolean, radii: boolean) => Geometry;
  material: new (values: object) => Material;
}

export interface GlView {
  readonly canvas: HTMLCanvasElement;
  /** Draws another scene; `show` has to follow. */
  draw(scene: Scene, stage: Stage, palette: Palette): void;
  /** Redraws from where the camera stands. */
  show(stage: Stage, camera: Camera): void;
  dispose(): void;
}

/** Half the angle of view in degrees: the library derives the width of its orthographic box from it. */
const FIELD = 1;
const CAMERA_HEIGHT = 150;
/** Share of the fog at the far end, through smoothstep(0.4666) = 0.45. */
const FOG_AT_BACK = 0.4666;
/** Å of ground around sticks in atom colours. */
const CASING = 0.035;
/** A group is indexed by 16 bits; four vertices a segment. */
const SEGMENTS_A_GROUP = 16_000;

/**
 * Opens a view in an element that has a size.
 *
 * @param onLost the browser took the context away: dispose of the view and open another
 * @throws Error or a text of the library where the browser gives no WebGL 2
 */
export function openGlView(library: Library, host: HTMLElement, ground: string, onLost: () => void): GlView {
  if (!hasWebGl2()) throw new Error("no WebGL 2");
  const { made: viewer, undo } = withoutLeftovers(() =>
    library.createViewer(host, {
      backgroundColor: ground,
      orthographic: true,
      antialias: true,
      nomouse: true,
    }),
  );
  const internals = viewer as unknown as Internals;
  const context = internals.renderer.getContext();
  const canvas = internals.renderer.domElement;
  if (!context || internals.renderer.isWebGL1()) {
    undo();
    throw new Error("no WebGL 2");
  }
  canvas.removeAttribute("id"); // the library writes "undefined" there
  context.canvas.addEventListener("webglcontextlost", onLost);
  viewer.setCameraParameters({ fov: FIELD, z: CAMERA_HEIGHT });
  const kit = kitOf(viewer, internals);
  const lines = newMaterial(kit, LINE_VERTEX, LINE_FRAGMENT, {
    thickness: { type: "f", value: 1 },
  });
  const placed: { mesh: Mesh; place: number }[] = [];
  let shownGround = ground;
  const remove = (meshes: readonly { mesh: Mesh }[]) => {
    for (const { mesh } of meshes) {
      internals.modelGroup.remove(mesh);
      mesh.geometry.dispose();
    }
  };
  const add = (segments: Segments, material: Material, place: number) => {
    if (segments.count === 0) return;
    const mesh = new kit.mesh(geometryOf(kit, segments), material);
    internals.modelGroup.add(mesh);
    placed.push({ mesh, place });
  };
  return {
    canvas,
    draw(scene, stage, palette) {
      const old = placed.splice(0);
      // Redraws at once, so only where it has to, and before the old meshes go: an empty scene upsets the renderer.
      if (shownGround !== palette.view.hex) viewer.setBackgroundColor(palette.view.hex, 1);
      shownGround = palette.view.hex;
      remove(old);
      add(faintLines(scene, palette), lines, 0);
      scene.strong.forEach((figure, place) => {
        const segments = strongSticks(scene, figure, place, palette);
        const casing = figure.held && !figure.change ? palette["held-edge"] : palette.view;
        add(segments, stickMaterial(kit, CASING, casing.rgb), place);
        add(segments, stickMaterial(kit, 0, casing.rgb), place);
      });
      const depth = Math.max(50, 2.2 * stage.reach + 5);
      const start = (depth - stage.reach) / (2 * depth);
      viewer.setSlab(-depth, depth);
      viewer.enableFog({ fogStart: start, fogEnd: start + stage.reach / FOG_AT_BACK / depth });
    },
    show(stage, camera) {
      const scale = stage.scale * camera.zoom;
      const back = inverse(camera.rotation);
      lines.uniforms.thickness = { type: "f", value: internals.renderer.devicePixelRatio * lineShare(scale) };
      for (const { mesh, place } of placed) {
        const cell = cellOf(stage, place);
        const right = cell.x + cell.width / 2 + camera.shift[0] - stage.width / 2;
        const down = cell.y + cell.height / 2 + camera.shift[1] - stage.height / 2;
        mesh.position.set(...rotate(back, [right / scale, -down / scale, 0]));
      }
      const distance = stage.width / (2 * scale * Math.tan((FIELD * Math.PI) / 180));
      const [x, y, z] = stage.centre;
      viewer.setView([-x, -y, -z, CAMERA_HEIGHT - distance, ...camera.rotation]);
    },
    dispose() {
      remove(placed.splice(0));
      // The next view may draw with this context, and would stumble over attributes without buffers.
      const attributes: number = context.getParameter(context.MAX_VERTEX_ATTRIBS) ?? 0;
      for (let k = 0; k < attributes; k++) context.disableVertexAttribArray(k);
      undo();
      internals.divwatcher?.disconnect();
      internals.intwatcher?.disconnect();
      context.canvas.removeEventListener("webglcontextlost", onLost);
      // Off the screen the library keeps one context for all views of the page: the next one draws with it.
      if (context.canvas === canvas) context.getExtension("WEBGL_lose_context")?.loseContext();
      canvas.remove();
      // Browsers keep a canvas for a while; what hangs on it need not wait with it.
      Reflect.deleteProperty(canvas, "_3dmol_viewer");
    },
  };
}

/** Asked first: the library writes its failure to the console. */
function hasWebGl2(): boolean {
  const probe = document.createElement("canvas").getContext("webgl2");
  probe?.getExtension("WEBGL_lose_context")?.loseContext();
  return probe !== null;
}

/**
 * The library binds listeners to the window, the body and its canvas and never takes them off; they are caught while it
 * starts, so that leaving the page leaves nothing behind.
 */
function withoutLeftovers<T>(make: () => T): { made: T; undo: () => void } {
  const caught: (() => void)[] = [];
  const undo = () => {
    for (const take of caught.splice(0)) take();
  };
  const plain = EventTarget.prototype.addEventListener;
  EventTarget.prototype.addEventListener = function (...args) {
    caught.push(() => this.removeEventListener(...args));
    plain.apply(this, args);
  };
  try {
    return { made: make(), undo };
  } catch (error) {
    undo();
    throw error;
  } finally {
    EventTarget.prototype.addEventListener = plain;
  }
}

/** The library does not export its mesh classes: a bond of two atoms is built once and asked what it is made of. */
function kitOf(viewer: ReturnType<Library["createViewer"]>, internals: Internals): Kit {
  const style = { stick: { radius: 0.1 } };
  const model = viewer.addModel();
  model.addAtoms([
    { elem: "C", x: 0, y: 0, z: 0, bonds: [1], bondOrder: [1], style },
    { elem: "C", x: 1, y: 0, z: 0, bonds: [0], bondOrder: [1], style },
  ]);
  const built = model as unknown as {
    globj(group: unknown, extensions: unknown): void;
    renderedMolObj: { children: Mesh[] };
  };
  built.globj(internals.modelGroup, internals.renderer.supportedExtensions());
  const sample = built.renderedMolObj.children[0];
  if (!sample) throw new Error("no WebGL 2");
  const kit = {
    mesh: sample.constructor,
    geometry: sample.geometry.constructor,
    material: sample.material.constructor,
  } as unknown as Kit;
  viewer.removeModel(model);
  return kit;
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

function stickMaterial(kit: Kit, casing: number, [r, g, b]: Rgb): Material {
  return newMaterial(kit, STICK_VERTEX, STICK_FRAGMENT, {
    casing: { type: "f", value: casing },
    casingColor: { type: "c", value: { r, g, b } },
  });
}

/** Coloured segments: 3 + 3 + 3 + 1 numbers each (from, to, colour, radius or code). */
interface Segments {
  count: number;
  numbers: Float32Array;
}
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

function faintLines(scene: Scene, palette: Palette): Segments {
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

function strongSticks(scene: Scene, figure: Figure, place: number, palette: Palette): Segments {
  const { positions: p, bonds } = figure;
  const writer = new SegmentWriter(bonds.length + scene.shown.length);
  const z = (atom: number) => scene.elements[atom] ?? 0;
  const rgb = (atom: number) => palette[atomToken(z(atom))].rgb;
  const thin = place > 0 && scene.mode === "overlay";
  const bonded = new Set<number>(bonds);
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a, b] = [bonds[k] ?? 0, bonds[k + 1] ?? 0];
    const [i, j] = [3 * a, 3 * b];
    const radius = stickRadius(z(a), z(b), thin);
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
    writer.add(...at, ...at, rgb(atom), thin ? 0.7 * BALL_RADIUS : BALL_RADIUS);
  }
  return writer;
}

function geometryOf(kit: Kit, segments: Segments): Geometry {
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
