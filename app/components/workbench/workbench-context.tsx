import { createContext, type ReactNode, useCallback, useContext, useDeferredValue, useMemo } from "react";
import { type ChangeState, useAddressState } from "~/hooks/use-address-state";
import { type Coordinates, useCoordinates } from "~/hooks/use-coordinates";
import { type DistanceColumn, useDistances } from "~/hooks/use-distances";
import { useHeld } from "~/hooks/use-held";
import type { SiftResult } from "~/lib/recipe/result";
import { type DistinctPopulations, distinctPopulations } from "~/lib/thermo/populations";
import type { WorkbenchState } from "~/lib/url-state";
import type { EnsembleView, LevelView, SiftView } from "~/lib/views";
import {
  byPopulation,
  type ConformerRow,
  conformerRows,
  type FrameRole,
  frameRoles,
} from "~/lib/workbench/conformers";
import { clickSelection } from "~/lib/workbench/selection";
import { MAX_OVERLAID } from "~/lib/workbench/view-plan";

/** Of larger sets the columns that need coordinates are computed for the most populated only, and the page says so. */
export const MAX_MEASURED = 5000;

export interface Workbench {
  ensemble: EnsembleView;
  /** The sift shown; its result is there when `result` is. */
  sift: SiftView | null;
  result: SiftResult | null;
  /** A set to go back to where the sift failed or was cancelled. */
  lastSet: string | null;
  level: LevelView | null;
  state: WorkbenchState;
  change: ChangeState;
  /** Follows the slider before the address does. */
  temperatureK: number;
  slideTemperature: (temperatureK: number) => void;
  /** Writes it to the address; until that has followed it stands all the same. */
  setTemperature: (temperatureK: number) => void;
  populations: DistinctPopulations | null;
  rows: readonly ConformerRow[];
  roles: ReadonlyMap<number, FrameRole>;
  /** Frame numbers, the lowest conformer where nothing was chosen. */
  selected: readonly number[];
  select: (frame: number, how: "only" | "add" | "extend", order: readonly number[]) => void;
  show: (frames: readonly number[]) => void;
  /** Shows the two alone, the second laid over the first. */
  layOver: (first: number, second: number) => void;
  coordinates: Coordinates;
  /** Conformers whose coordinates the computed columns cover. */
  measured: ReadonlySet<number>;
  column: DistanceColumn | null;
  /**
   * Frame over which the view lays everything: the lowest conformer, so that the picture opens from the same side
   * whatever is selected; before there is a set, the first frame that can be shown.
   */
  anchor: number | null;
  /** Row that the RMSD column is taken to. */
  reference: ConformerRow | null;
}

const Context = createContext<Workbench | null>(null);

/** The workbench around a section. */
export function useWorkbench(): Workbench {
  const workbench = useContext(Context);
  if (workbench === null) throw new Error("A section stands outside its workbench.");
  return workbench;
}

const NO_ROWS: readonly ConformerRow[] = [];
const NO_ROLES: ReadonlyMap<number, FrameRole> = new Map();

/** Holds what the sections share: the ensemble, the sift, what is selected, and what follows from them. */
export function WorkbenchProvider({
  ensemble,
  sift,
  lastSet,
  first,
  section,
  children,
}: {
  ensemble: EnsembleView;
  sift: SiftView | null;
  lastSet: string | null;
  /** Frame to show while there is no distinct set. */
  first: number | null;
  /** Last part of the address: what a section does not show is not computed. */
  section: string;
  children: ReactNode;
}) {
  const [state, change] = useAddressState();
  const { shown: temperatureK, hold: slideTemperature, sent } = useHeld(state.temperatureK);
  const setTemperature = useCallback(
    (next: number) => {
      slideTemperature(next);
      sent(next);
      void change({ temperatureK: next }, { gradual: true });
    },
    [slideTemperature, sent, change],
  );
  const result = sift?.result ?? null;
  const level = ensemble.levels.find((one) => one.id === sift?.recipe.level) ?? null;
  const energyKind = level?.energyKind ?? "electronic";

  const populations = useMemo(
    () => (result ? distinctPopulations(result.kept, energyKind, temperatureK, state.weights) : null),
    [result, energyKind, temperatureK, state.weights],
  );
  const rows = useMemo(
    () => (result ? conformerRows(result.kept, populations, state.windowKcal) : NO_ROWS),
    [result, populations, state.windowKcal],
  );
  const roles = useMemo(() => (result ? frameRoles(result) : NO_ROLES), [result]);
  // Not bound to the rows: those are others at every temperature, the lowest conformer is not.
  const lowest = rows[0]?.frame ?? first;
  const selected = useMemo(
    () => chosenFrames(state.selected, lowest, ensemble.frames),
    [state.selected, lowest, ensemble.frames],
  );

  const anchor = rows[0]?.frame ?? first ?? selected[0] ?? null;

  const select = useCallback<Workbench["select"]>(
    (frame, how, order) =>
      change({ selected: clickSelection(selected, frame, order, how) }, { gradual: how === "extend" }),
    [change, selected],
  );
  const show = useCallback<Workbench["show"]>((frames) => change({ selected: [...frames] }), [change]);
  const layOver = useCallback<Workbench["layOver"]>(
    (first, second) => change({ selected: [first, second], pair: true, mode: "overlay" }),
    [change],
  );

  const { coordinates, measured, column, reference } = useMeasures({
    ensemble,
    sift,
    rows,
    selected,
    picked: state.atoms.length >= 2,
    section,
    anchor,
  });

  const value = useMemo<Workbench>(
    () => ({
      ensemble,
      sift,
      result,
      lastSet,
      level,
      state,
      change,
      temperatureK,
      slideTemperature,
      setTemperature,
      populations,
      rows,
      roles,
      selected,
      select,
      show,
      layOver,
      coordinates,
      measured,
      column,
      reference,
      anchor,
    }),
    [
      ensemble,
      sift,
      result,
      lastSet,
      level,
      state,
      change,
      temperatureK,
      slideTemperature,
      setTemperature,
      populations,
      rows,
      roles,
      selected,
      select,
      show,
      layOver,
      coordinates,
      measured,
      column,
      reference,
      anchor,
    ],
  );
  return <Context value={value}>{children}</Context>;
}

/** What the address selects of the frames that there are; the lowest conformer where it selects nothing. */
function chosenFrames(
  asked: readonly number[] | null,
  lowest: number | null,
  frames: number,
): readonly number[] {
  if (asked !== null) return asked.filter((frame) => frame <= frames);
  return lowest === null ? [] : [lowest];
}

/** Coordinates that the section needs, and the distances worked out from them. */
function useMeasures({
  ensemble,
  sift,
  rows,
  selected,
  picked,
  section,
  anchor,
}: {
  ensemble: EnsembleView;
  sift: SiftView | null;
  rows: readonly ConformerRow[];
  selected: readonly number[];
  picked: boolean;
  section: string;
  anchor: number | null;
}) {
  // The set that is measured must not change with the temperature, or every step of the slider would begin it anew.
  const frames = useMemo(
    () => (sift?.result?.kept ?? []).slice(0, MAX_MEASURED).map((conformer) => conformer.frame),
    [sift],
  );
  // Which frames are overlaid hangs on the populations; while the temperature moves it need not keep up.
  const settled = useDeferredValue(rows);
  const distances = ["populations", "distinct-set"].includes(section);
  const wanted = useMemo(() => {
    const overlaid = byPopulation(settled)
      .slice(0, MAX_OVERLAID)
      .map((row) => row.frame);
    const lowest = anchor === null ? [] : [anchor];
    return [...new Set([...lowest, ...selected, ...overlaid, ...(distances || picked ? frames : [])])];
  }, [settled, selected, distances, picked, frames, anchor]);
  const coordinates = useCoordinates(ensemble.id, ensemble.atoms, wanted);
  const measured = useMemo(() => new Set(frames), [frames]);

  const set = useMemo(
    () =>
      sift?.result && distances
        ? {
            key: sift.id,
            elements: ensemble.elements,
            bonds: ensemble.bonds,
            options: {
              atoms: sift.recipe.atoms,
              symmetry: sift.recipe.symmetry,
              mirror: sift.recipe.mirror === "merge",
            },
            frames,
          }
        : null,
    [sift, ensemble, distances, frames],
  );
  const byFrame = useMemo(() => new Map(rows.map((row) => [row.frame, row])), [rows]);
  const reference =
    selected.map((frame) => byFrame.get(frame)).find((row) => row !== undefined) ?? rows[0] ?? null;
  const at = reference === null ? null : frames.indexOf(reference.frame);
  const column = useDistances(set, coordinates.positions, at === null || at < 0 ? null : at);
  return { coordinates, measured, column, reference };
}
