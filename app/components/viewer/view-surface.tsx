import { type RefObject, useId, useMemo } from "react";
import type { Mark } from "~/lib/view/mark";
import { MarkLayer } from "./mark-layer";
import { Still } from "./still";
import { type LazyCanvas, useQuiet } from "./use-canvas";
import type { Gestures } from "./use-gestures";
import type { View } from "./use-view";

/** Picture, canvas, marks and what takes pointer and keys, one over the other. */
export function ViewSurface({
  view,
  canvas,
  marks,
  words,
  gestures,
  still,
}: {
  view: View;
  canvas: LazyCanvas;
  marks: readonly Mark[];
  /** The picture in words. */
  words: string;
  gestures: Gestures;
  /** Holds the still picture, for whoever saves it. */
  still: RefObject<HTMLDivElement | null>;
}) {
  const help = useId();
  const { scene, stage, camera } = view;
  const picture = useMemo(
    () => ({ scene, stage, camera, marks, label: words }),
    [scene, stage, camera, marks, words],
  );
  // Behind the canvas it is there for print alone: drawn again when things stand still, not with every movement.
  const stillPicture = useQuiet(picture, canvas.element !== null);
  const { Canvas } = canvas;
  const cursor = gestures.hovered ? "cursor-pointer" : "cursor-grab active:cursor-grabbing";
  return (
    <div ref={view.box} className="absolute inset-0">
      <div ref={still} className={canvas.element ? "hidden print:block print:size-full" : "size-full"}>
        <Still {...stillPicture} />
      </div>
      {Canvas && scene.strong.length > 0 ? (
        <Canvas scene={scene} stage={stage} camera={camera} onReady={canvas.onReady} onFail={canvas.onFail} />
      ) : null}
      {canvas.element ? (
        <svg
          data-marks=""
          aria-hidden="true"
          width={stage.width}
          height={stage.height}
          className="pointer-events-none absolute inset-0 print:hidden"
        >
          <MarkLayer marks={marks} />
        </svg>
      ) : null}
      <div
        role="application"
        aria-roledescription="3D view"
        aria-label={words}
        aria-describedby={help}
        // biome-ignore lint/a11y/noNoninteractiveTabindex: an application takes the keys that turn and zoom it
        tabIndex={0}
        {...gestures.handlers}
        className={`absolute inset-0 -outline-offset-2 print:hidden ${gestures.touch} ${cursor}`}
      />
      <p id={help} className="sr-only">
        Arrow keys turn the figure, plus and minus zoom, 0 resets. Atoms are picked by name in the field Atoms
        to measure.
      </p>
    </div>
  );
}
