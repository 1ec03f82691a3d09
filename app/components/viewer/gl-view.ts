import type { Camera } from "~/lib/view/camera";
import { inverse, rotate } from "~/lib/view/camera";
import type { Scene } from "~/lib/view/scene";
import { cellOf, type Stage } from "~/lib/view/stage";
import {
  faintLines,
  geometryOf,
  type Kit,
  lineMaterial,
  type Material,
  type Mesh,
  type Segments,
  stickMaterial,
  strongSticks,
} from "./gl-meshes";
import { layerOf, lineShare, type Palette } from "./look";

/**
 * The molecules on a WebGL canvas, drawn by 3dmol's renderer: one mesh of lines for all conformers in their tint, one
 * of sticks for each in atom colours. The library's models are not used: one of 500 conformers with 21,500 shown atoms took 0.4 to
 * 0.6 s until it stood (software rendering), writing these arrays takes 0.02 s, and a temperature slider has to be followed.
 *
 * What is used of the library beyond its public interface is listed in `Internals`; its version is pinned.
 */

type Library = typeof import("3dmol");

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
  const lines = lineMaterial(kit);
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
        const { back } = layerOf(scene.mode === "overlay" ? place : 0);
        add(segments, stickMaterial(kit, CASING, casing.rgb, back), place);
        add(segments, stickMaterial(kit, 0, casing.rgb, back), place);
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
