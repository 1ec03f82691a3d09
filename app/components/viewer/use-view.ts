import { type RefObject, useEffect, useMemo, useRef, useState } from "react";
import { type Camera, homeCamera } from "~/lib/view/camera";
import { createPlacer } from "~/lib/view/placer";
import { buildScene, type Scene, type SceneInput, type ViewConformer } from "~/lib/view/scene";
import { homeRotation, type Stage, stageOf } from "~/lib/view/stage";

/** Assumed until the box is measured, and on the server. */
const ASSUMED = { width: 420, height: 392 };

const NOTHING: readonly ViewConformer[] = [];

export interface View {
  box: RefObject<HTMLDivElement | null>;
  scene: Scene;
  stage: Stage;
  camera: Camera;
  setCamera(next: Camera | ((camera: Camera) => Camera)): void;
  reset(): void;
}

/** Scene, stage and camera of a view, kept steady while conformers, populations and the size of the box change. */
export function useView(input: SceneInput & { anchor?: ViewConformer["positions"] | null }): View {
  const { elements, bonds, alignOn, hydrogens, mode } = input;
  const [first] = input.conformers;
  const anchor = input.anchor === undefined ? (first?.positions ?? null) : input.anchor;
  const conformers = anchor === null ? NOTHING : input.conformers;
  const box = useRef<HTMLDivElement>(null);
  const [size, setSize] = useState(ASSUMED);
  const [place] = useState(createPlacer);
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
