import { Camera as CameraIcon, Hash, Maximize, Minimize, RotateCcw } from "lucide-react";
import {
  type ComponentType,
  type ReactNode,
  useCallback,
  useEffect,
  useId,
  useMemo,
  useRef,
  useState,
} from "react";
import { IconButton } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { DepthKey } from "~/components/ui/depth-key";
import type { HydrogenMode, ViewMode } from "~/lib/url-state";
import { pickText, viewMarks } from "~/lib/view/marks";
import { togglePick } from "~/lib/view/read-picks";
import type { ViewConformer } from "~/lib/view/scene";
import { pickWords, sceneWords } from "~/lib/view/words";
import { MarkLayer } from "./mark-layer";
import { PickAtoms } from "./pick-atoms";
import { Still } from "./still";
import { useFullScreen } from "./use-full-screen";
import { useGestures } from "./use-gestures";
import { useView } from "./use-view";
import { HydrogenSegments, ViewBar } from "./view-bar";
import type { CanvasProps } from "./viewer.client";

export interface ViewerProps {
  /** Atomic numbers, and bonds as flat pairs from 0, of the group. */
  elements: readonly number[];
  bonds: readonly number[];
  conformers: readonly ViewConformer[];
  /** Atoms from 0; null: the heavy atoms. */
  alignOn: readonly number[] | null;
  /** Atoms from 0, up to four. */
  picked: readonly number[];
  onPick(atoms: number[]): void;
  hydrogens: HydrogenMode;
  mode: ViewMode;
  onMode(mode: ViewMode): void;
  onHydrogens(hydrogens: HydrogenMode): void;
  caption: { strong: string; rest: string };
  /** What the pick measures; the first belongs to the first selected conformer and stands in the picture. */
  measures: readonly { label: string; text: string }[];
  /** Of the picture that is saved; the caption when absent. */
  title?: string;
  /** Stands between the depth key and the field for atoms: the list of what is selected. */
  children?: ReactNode;
}

/**
 * The 3D view of an ensemble with its tools. A still picture stands in until the canvas is ready, and stays where there
 * is no WebGL; it can be turned, zoomed and picked in like the canvas.
 */
export function Viewer(props: ViewerProps) {
  const { elements, picked, onPick, mode, hydrogens, caption, measures } = props;
  // Only a picked hydrogen changes what is drawn: other picks must not build the scene again.
  const always = useStable(picked.filter((atom) => elements[atom] === 1));
  const view = useView({ ...props, always });
  const { scene, stage, camera } = view;
  const canvas = useCanvas();
  const [numbers, setNumbers] = useState(false);
  const [options, setOptions] = useState(false);
  const fullScreen = useFullScreen();
  const gestures = useGestures(view, fullScreen.on, (atom) => onPick(togglePick(picked, atom)));
  const lead = scene.strong[0];
  const first = measures[0];
  const texts =
    measures.length > 0
      ? measures.map(({ label, text }) => `${label} ${text}`)
      : lead && picked.length > 0
        ? [pickText(scene, lead, picked)]
        : [];
  const text = first ? `${first.label} ${first.text}` : null;
  const drawn = useMemo(
    () => ({ scene, stage, camera, picked, pickText: text, numbers }),
    [scene, stage, camera, picked, text, numbers],
  );
  const marks = useMemo(() => viewMarks({ ...drawn, hovered: gestures.hovered }), [drawn, gestures.hovered]);
  const words = sceneWords(scene, caption);
  const help = useId();
  const picture = useMemo(
    () => ({ scene, stage, camera, marks, label: words }),
    [scene, stage, camera, marks, words],
  );
  // Behind the canvas it is there for print alone: drawn again when things stand still, not with every movement.
  const stillPicture = useQuiet(picture, canvas.element !== null);
  const still = useRef<HTMLDivElement>(null);
  const save = async () => {
    const tools = await import("./picture");
    const title = props.title ?? caption.strong;
    const molecules = canvas.element ?? (await tools.drawnStill(still.current));
    const subtitle = `${caption.strong} ${caption.rest}`.trim();
    tools.saveAs(
      await tools.pictureOf({
        molecules,
        marks,
        width: stage.width,
        height: stage.height,
        title,
        subtitle,
      }),
      tools.fileName(title),
    );
  };
  const { Canvas } = canvas;
  return (
    <figure className="min-w-0">
      <div
        ref={fullScreen.box}
        className="relative h-62 overflow-hidden rounded-md border border-rule-2 bg-view lg:h-80 xl:h-98 print:h-98 [&:fullscreen]:rounded-none [&:fullscreen]:border-0"
      >
        <div ref={view.box} className="absolute inset-0">
          <div ref={still} className={canvas.element ? "hidden print:block print:size-full" : "size-full"}>
            <Still {...stillPicture} />
          </div>
          {Canvas && scene.strong.length > 0 ? (
            <Canvas
              scene={scene}
              stage={stage}
              camera={camera}
              onReady={canvas.onReady}
              onFail={canvas.onFail}
            />
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
            className={`absolute inset-0 -outline-offset-2 print:hidden ${gestures.touch} ${gestures.hovered ? "cursor-pointer" : "cursor-grab active:cursor-grabbing"}`}
          />
          <p id={help} className="sr-only">
            Arrow keys turn the figure, plus and minus zoom, 0 resets. Atoms are picked by name in the field
            Atoms to measure.
          </p>
        </div>
        <figcaption className="pointer-events-none absolute top-2 left-3 max-w-[calc(100%-8.5rem)] max-lg:max-w-[calc(100%-8rem)] text-xs text-ink-2 lg:top-3">
          <b className="font-semibold text-ink">{caption.strong}</b> {caption.rest}
        </figcaption>
        <div className="absolute top-1 right-1 flex lg:top-2 lg:right-2 pointer-coarse:-top-1 pointer-coarse:[&_button]:w-9 print:hidden">
          <IconButton label="Reset view" onClick={view.reset}>
            <RotateCcw aria-hidden="true" />
          </IconButton>
          <IconButton
            label="Atom numbers"
            aria-pressed={numbers}
            onClick={() => setNumbers(!numbers)}
            className="max-lg:hidden"
          >
            <Hash aria-hidden="true" />
          </IconButton>
          <IconButton label="Save picture" onClick={save}>
            <CameraIcon aria-hidden="true" />
          </IconButton>
          {fullScreen.offered ? (
            <IconButton label={fullScreen.on ? "Leave full width" : "Full width"} onClick={fullScreen.toggle}>
              {fullScreen.on ? <Minimize aria-hidden="true" /> : <Maximize aria-hidden="true" />}
            </IconButton>
          ) : null}
        </div>
      </div>
      <ViewBar
        mode={mode}
        onMode={props.onMode}
        hydrogens={hydrogens}
        onHydrogens={props.onHydrogens}
        end={
          <button
            type="button"
            aria-expanded={options}
            onClick={() => setOptions(!options)}
            className="h-7 rounded-md border border-edge bg-sheet px-3 text-xs font-medium text-ink lg:hidden pointer-coarse:h-11"
          >
            View
          </button>
        }
      />
      <div className={`mt-3 grid gap-3 print:hidden ${options ? "" : "max-lg:hidden"}`}>
        <div className="flex flex-wrap items-center gap-x-6 gap-y-2 lg:hidden">
          <HydrogenSegments hydrogens={hydrogens} onHydrogens={props.onHydrogens} />
          <Checkbox checked={numbers} onChange={() => setNumbers(!numbers)}>
            Atom numbers
          </Checkbox>
        </div>
        <DepthKey className="w-full" />
        {props.children}
        <PickAtoms elements={elements} picked={picked} onPick={onPick} />
        <p role="status" className="text-xs text-ink-3">
          {pickWords(picked, texts)}
          {canvas.failed
            ? " This browser draws no 3D (it has no WebGL 2): a picture stands in, and can be turned, picked in and saved all the same."
            : ""}
        </p>
      </div>
    </figure>
  );
}

interface LazyCanvas {
  Canvas: ComponentType<CanvasProps> | null;
  element: HTMLCanvasElement | null;
  failed: boolean;
  onReady(canvas: HTMLCanvasElement | null): void;
  onFail(): void;
}

/** Loads the canvas once the page stands; the still picture is there meanwhile, and remains if loading fails. */
function useCanvas(): LazyCanvas {
  const [Canvas, setCanvas] = useState<ComponentType<CanvasProps> | null>(null);
  const [element, setElement] = useState<HTMLCanvasElement | null>(null);
  const [failed, setFailed] = useState(false);
  useEffect(() => {
    let here = true;
    import("./viewer.client").then(
      (module) => here && setCanvas(() => module.default),
      () => here && setFailed(true),
    );
    return () => {
      here = false;
    };
  }, []);
  const onFail = useCallback(() => {
    setElement(null);
    setFailed(true);
  }, []);
  return { Canvas: failed ? null : Canvas, element, failed, onReady: setElement, onFail };
}

/** Milliseconds after the last movement in which a picture that nobody sees is drawn again. */
const QUIET_MS = 400;

/** A value as it is, or, where it may lag, as it was when it last stood still. */
function useQuiet<T>(value: T, lagging: boolean): T {
  const [settled, setSettled] = useState(value);
  useEffect(() => {
    if (!lagging) return;
    const timer = setTimeout(() => setSettled(value), QUIET_MS);
    return () => clearTimeout(timer);
  }, [value, lagging]);
  return lagging ? settled : value;
}

/** The same array as long as its numbers are the same. */
function useStable(list: number[]): number[] {
  const key = list.join(" ");
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key stands for the list
  return useMemo(() => list, [key]);
}
