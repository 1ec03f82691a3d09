import type { HydrogenMode } from "../url-state.ts";
import type { Quaternion } from "../view/camera.ts";
import { buildScene, type Figure, type Scene } from "../view/scene.ts";
import { homeRotation, type Stage, stageOf } from "../view/stage.ts";

/** A conformer as the pictures of an edition take it. */
export interface ShapeInput {
  frame: number;
  name: string;
  population: number | null;
  /** Packed x, y, z. */
  positions: Float64Array;
}

export interface LaidShape {
  figure: Figure;
  rotation: Quaternion;
  stage: Stage;
}

/**
 * The shapes of an edition for pictures side by side: each shows its own broad side, since a folded and a stretched-out
 * shape seen from one place may both stand edge-on, and all are drawn at one scale.
 *
 * @returns null where there is no shape
 * @example layOutShapes(ensemble, shapes, 264, 184, "polar")?.figures.length // 4
 */
export function layOutShapes(
  { elements, bonds }: { elements: readonly number[]; bonds: readonly number[] },
  shapes: readonly ShapeInput[],
  width: number,
  height: number,
  hydrogens: HydrogenMode,
): { scene: Scene; figures: LaidShape[] } | null {
  if (shapes.length === 0) return null;
  const scene = buildScene({
    elements,
    bonds,
    conformers: shapes.map((shape) => ({ ...shape, selected: true })),
    alignOn: null,
    hydrogens,
    mode: "overlay",
  });
  const laid = scene.strong.map((figure) => {
    const rotation = homeRotation(elements, bonds, figure.positions);
    const alone: Scene = { ...scene, mode: "one", strong: [figure], faint: [] };
    return { figure, rotation, stage: stageOf(alone, rotation, width, height, "bare") };
  });
  const scale = Math.min(...laid.map(({ stage }) => stage.scale));
  return { scene, figures: laid.map((one) => ({ ...one, stage: { ...one.stage, scale } })) };
}
