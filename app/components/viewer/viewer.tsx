import { type ReactNode, useMemo, useRef, useState } from "react";
import { Checkbox } from "~/components/ui/checkbox";
import { DepthKey } from "~/components/ui/depth-key";
import { firstUnbonded } from "~/lib/averages/observable";
import { measureLabel } from "~/lib/measure/measure";
import { makeGraph } from "~/lib/structure";
import type { HydrogenMode, ViewMode } from "~/lib/url-state";
import type { Ghost } from "~/lib/view/ghost";
import { pickText, viewMarks } from "~/lib/view/marks";
import { togglePick } from "~/lib/view/read-picks";
import type { ViewConformer } from "~/lib/view/scene";
import { pickWords, sceneWords } from "~/lib/view/words";
import { PickAtoms } from "./pick-atoms";
import { type LazyCanvas, useCanvas, useStable } from "./use-canvas";
import { useFullScreen } from "./use-full-screen";
import { useGestures } from "./use-gestures";
import { useView } from "./use-view";
import { fewerHydrogens, HydrogenSegments, type Modes, ViewBar } from "./view-bar";
import { ViewSurface } from "./view-surface";
import { ViewTools } from "./view-tools";

export interface ViewerProps {
  /** Atomic numbers, and bonds as flat pairs from 0, of the group. */
  elements: readonly number[];
  bonds: readonly number[];
  conformers: readonly ViewConformer[];
  /**
   * Coordinates over which everything lies and from which the view opens: the same ones at every visit. Null where they
   * are not here yet: nothing is drawn before. Left out, the first conformer that comes.
   */
  anchor?: ViewConformer["positions"] | null;
  /** Atoms from 0; null: the heavy atoms. */
  alignOn: readonly number[] | null;
  /** Atoms from 0, up to four. */
  picked: readonly number[];
  onPick(atoms: number[]): void;
  hydrogens: HydrogenMode;
  /** What is shown has no more hydrogens than these; all where left out. */
  mostHydrogens?: HydrogenMode;
  mode: ViewMode;
  /** Arrangements to choose from; none where there is nothing to arrange. Those of conformers where left out. */
  modes?: Modes;
  onMode(mode: ViewMode): void;
  onHydrogens(hydrogens: HydrogenMode): void;
  caption: { strong: string; rest: string };
  /** A structure from outside, dashed over the first conformer. */
  ghost?: Ghost;
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
  const { elements, picked, onPick, caption, measures, ghost } = props;
  // Only a picked hydrogen changes what is drawn: other picks must not build the scene again.
  const always = useStable(picked.filter((atom) => elements[atom] === 1));
  const drawnHydrogens = fewerHydrogens(props.hydrogens, props.mostHydrogens ?? "all");
  const view = useView({ ...props, hydrogens: drawnHydrogens, always });
  const { scene, stage, camera } = view;
  const canvas = useCanvas();
  const [numbers, setNumbers] = useState(false);
  const [failedToSave, setFailedToSave] = useState(false);
  const fullScreen = useFullScreen();
  const gestures = useGestures(view, fullScreen.on, (atom) => onPick(togglePick(picked, atom)));
  const first = measures[0];
  const text = first ? `${first.label} ${first.text}` : null;
  const drawn = useMemo(
    () => ({ scene, stage, camera, picked, pickText: text, numbers, ghost }),
    [scene, stage, camera, picked, text, numbers, ghost],
  );
  const marks = useMemo(() => viewMarks({ ...drawn, hovered: gestures.hovered }), [drawn, gestures.hovered]);
  const still = useRef<HTMLDivElement>(null);
  const save = async () => {
    try {
      const tools = await import("./picture");
      const title = props.title ?? caption.strong;
      const picture = await tools.pictureOf({
        molecules: canvas.element ?? (await tools.drawnStill(still.current)),
        marks: viewMarks(drawn),
        width: stage.width,
        height: stage.height,
        title,
        subtitle: `${caption.strong} ${caption.rest}`.trim(),
      });
      tools.saveAs(picture, tools.fileName(title));
      setFailedToSave(false);
    } catch {
      // Too little memory for the picture, or its code did not arrive: the view itself goes on.
      setFailedToSave(true);
    }
  };
  const lead = scene.strong[0];
  const own = lead && picked.length > 0 ? [pickText(scene, lead, picked)] : [];
  const open = useMemo(
    () =>
      picked.length === 4 && props.bonds.length > 0
        ? firstUnbonded(makeGraph(Uint8Array.from(elements), Int32Array.from(props.bonds)), picked)
        : null,
    [elements, props.bonds, picked],
  );
  const texts = measures.length > 0 ? measures.map(({ label, text }) => `${label} ${text}`) : own;
  return (
    // On paper an empty box says nothing: it is left out where no structure has come yet.
    <figure className={`min-w-0 ${props.conformers.length === 0 ? "print:hidden" : ""}`}>
      <div
        ref={fullScreen.box}
        className="relative h-62 overflow-hidden rounded-md border border-rule-2 bg-view lg:h-80 xl:h-98 print:h-98 [&:fullscreen]:rounded-none [&:fullscreen]:border-0"
      >
        <ViewSurface {...{ view, canvas, marks, gestures, still }} words={sceneWords(scene, caption)} />
        <figcaption className="pointer-events-none absolute top-2 left-3 max-w-[calc(100%-8.5rem)] text-xs text-ink-2 max-lg:max-w-[calc(100%-8rem)] lg:top-3">
          <b className="font-semibold text-ink">{caption.strong}</b> {caption.rest}
        </figcaption>
        <ViewTools
          onReset={view.reset}
          numbers={numbers}
          onNumbers={() => setNumbers(!numbers)}
          onSave={save}
          fullScreen={fullScreen}
        />
      </div>
      <ViewOptions {...props} list={props.children} numbers={numbers} onNumbers={() => setNumbers(!numbers)}>
        <p role="status" className="text-xs text-ink-3">
          {[
            pickWords(picked, texts, open === null ? null : measureLabel(elements, open)),
            failureWords(canvas.failure),
            failedToSave ? "The picture could not be made: take a smaller view and try again." : "",
          ]
            .filter((sentence) => sentence !== "")
            .join(" ")}
        </p>
      </ViewOptions>
    </figure>
  );
}

/** What stands below the picture; below 1024 px most of it waits behind one button. */
function ViewOptions({
  numbers,
  onNumbers,
  children,
  ...props
}: ViewerProps & { numbers: boolean; onNumbers(): void; list: ReactNode }) {
  const [open, setOpen] = useState(false);
  return (
    <>
      <ViewBar
        mode={props.mode}
        modes={props.modes}
        onMode={props.onMode}
        hydrogens={props.hydrogens}
        mostHydrogens={props.mostHydrogens}
        onHydrogens={props.onHydrogens}
        end={
          <button
            type="button"
            aria-expanded={open}
            onClick={() => setOpen(!open)}
            className="h-7 rounded-md border border-edge bg-sheet px-3 text-xs font-medium text-ink lg:hidden pointer-coarse:h-11"
          >
            View
          </button>
        }
      />
      <div className={`mt-3 grid gap-3 print:hidden ${open ? "" : "max-lg:hidden"}`}>
        <div className="flex flex-wrap items-center gap-x-6 gap-y-2 lg:hidden">
          <HydrogenSegments
            hydrogens={props.hydrogens}
            most={props.mostHydrogens}
            onHydrogens={props.onHydrogens}
          />
          <Checkbox checked={numbers} onChange={onNumbers}>
            Atom numbers
          </Checkbox>
        </div>
        {props.conformers.some(({ population }) => population !== null) ? (
          <DepthKey className="w-full" />
        ) : null}
        {props.list}
        <PickAtoms elements={props.elements} picked={props.picked} onPick={props.onPick} />
        {children}
      </div>
    </>
  );
}

function failureWords(failure: LazyCanvas["failure"]): string {
  if (failure === null) return "";
  const reason =
    failure === "no WebGL"
      ? "This browser draws no 3D (it has no WebGL 2)"
      : "The 3D part of this page did not arrive";
  return `${reason}: a picture stands in, and can be turned, picked in and saved all the same.`;
}
