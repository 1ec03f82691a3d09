import { type RefObject, useEffect, useMemo, useRef, useState } from "react";
import { type Camera, homeCamera } from "~/lib/view/camera";
import { createPlacer } from "~/lib/view/placer";
import { buildScene, type Scene, type SceneInput, type ViewConformer } from "~/lib/view/scene";
import { homeRotation, type Stage, stageOf } from "~/lib/view/stage";

/** Assumed until the box is measured, and on the server. */
const ASSUMED = { width: 420, height: 392 };

export interface View {
  box: RefObject<HTMLDivElement | null>;
  scene: Scene;
  stage: Stage;
  camera: Camera;
  setCamera(next: Camera | ((camera: Camera) => Camera)): void;
  reset(): void;
}

/** Scene, stage and camera of a view, kept steady while conformers, populations and the size of the box change. */
export function useView(input: SceneInput): View {
  const { elements, bonds, conformers, alignOn, hydrogens, mode } = input;
  const box = useRef<HTMLDivElement>(null);
  const [size, setSize] = useState(ASSUMED);
  const [place] = useState(createPlacer);
  const anchor = useAnchor(elements, conformers);
  const scene = useMemo(
    () => buildScene({ elements, bonds, conformers, alignOn, hydrogens, mode }, { place, anchor }),
    [elements, bonds, conformers, alignOn, hydrogens, mode, place, anchor],
  );
  const home = useMemo(() => homeRotation(elements, bonds, anchor), [elements, bonds, anchor]);
  const stage = useMemo(() => stageOf(scene, home, size.width, size.height), [scene, home, size]);
  const [moved, setMoved] = useState<{ home: typeof home; camera: Camera } | null>(null);
  // A camera that was turned about another molecule means nothing for this one.
  const camera = useMemo(() => (moved?.home === home ? moved.camera : homeCamera(home)), [moved, home]);
  useEffect(() => {
    const element = box.current;
    if (!element) return;
    const watch = new ResizeObserver(() => {
      const { clientWidth: width, clientHeight: height } = element;
      if (width > 0 && height > 0) setSize({ width, height });
    });
    watch.observe(element);
    return () => watch.disconnect();
  }, []);
  return {
    box,
    scene,
    stage,
    camera,
    setCamera: (next) =>
      setMoved((last) => {
        const from = last?.home === home ? last.camera : homeCamera(home);
        return { home, camera: typeof next === "function" ? next(from) : next };
      }),
    reset: () => setMoved(null),
  };
}

/** Coordinates over which everything is laid, for as long as the molecule is the same. */
function useAnchor(
  elements: readonly number[],
  conformers: readonly ViewConformer[],
): ViewConformer["positions"] | null {
  const key = elements.join(" ");
  const [kept, setKept] = useState<{ key: string; positions: ViewConformer["positions"] } | null>(null);
  const first = conformers[0]?.positions ?? null;
  if (kept?.key === key) return kept.positions;
  // State set while rendering: the first conformers that arrive decide, before anything is drawn.
  if (first) setKept({ key, positions: first });
  return first;
}
