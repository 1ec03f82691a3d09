import { useCallback, useMemo } from "react";
import { useLocation, useNavigate, useRouteLoaderData } from "react-router";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { measureLabel } from "~/lib/measure/measure";
import { type OutsideChoice, readOutsideChoice, writeOutsideChoice } from "~/lib/outside/choice";
import { mainTorsions } from "~/lib/outside/compare-outside";
import { nearestRows, type OutsideRow } from "~/lib/outside/finding";
import { makeGraph } from "~/lib/structure";
import { searchOf } from "~/lib/url-state";
import type { loader } from "~/routes/workbench/compare";
import type { OutsideComparison } from "~/services/outside/compare-outside.server";
import type { OutsideView } from "~/services/outside/list-outside.server";

/** The page's answer, wherever on the page it is asked for; null on other pages. */
export function useOutsidePage() {
  return useRouteLoaderData<typeof loader>("routes/workbench/compare") ?? null;
}

/** What is compared, in the address beside the rest. */
export function useOutsideChoice(): [OutsideChoice, (part: Partial<OutsideChoice>) => void] {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const choice = useMemo(() => readOutsideChoice(new URLSearchParams(search)), [search]);
  const change = useCallback(
    (part: Partial<OutsideChoice>) => {
      const params = writeOutsideChoice({ ...choice, ...part }, new URLSearchParams(search));
      void navigate({ pathname, search: searchOf(params) }, { preventScrollReset: true });
    },
    [choice, search, pathname, navigate],
  );
  return [choice, change];
}

export interface Comparison extends OutsideComparison {
  structure: OutsideView;
  /** Mirror images count: the molecule is achiral and nobody left them out. */
  countMirror: boolean;
  /** Conformers, nearest first. */
  near: readonly OutsideRow[];
  /** The one that is laid over. */
  over: OutsideRow;
  /** Names of the main torsions. */
  labels: readonly string[];
  torsionAtoms: readonly [number, number, number, number][];
}

/** The structure chosen against the distinct set shown, with populations as they stand; null while there is none. */
export function useComparison(): Comparison | null {
  const { ensemble, rows, sift } = useWorkbench();
  const page = useOutsidePage();
  const [choice] = useOutsideChoice();
  const found = page?.comparison ?? null;
  const structure = page?.structures.find(({ id }) => id === found?.outsideId) ?? null;
  const countMirror = choice.mirror && ensemble.chirality === "achiral";
  const near = useMemo(
    () => (found === null || found.siftId !== sift?.id ? [] : nearestRows(rows, found, countMirror)),
    [rows, found, sift?.id, countMirror],
  );
  const torsionAtoms = useMemo(
    () => mainTorsions(makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds)),
    [ensemble.elements, ensemble.bonds],
  );
  const labels = useMemo(
    () => torsionAtoms.map((atoms) => measureLabel(ensemble.elements, atoms)),
    [torsionAtoms, ensemble.elements],
  );
  const over = near.find((row) => row.frame === choice.over) ?? near[0];
  if (found === null || structure === null || over === undefined) return null;
  return { ...found, structure, countMirror, near, over, labels, torsionAtoms };
}
