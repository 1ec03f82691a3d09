import { useMemo } from "react";
import { Note } from "~/components/ui/note";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { Viewer, type ViewerProps } from "~/components/viewer/viewer";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useCoordinates } from "~/hooks/use-coordinates";
import { fixed, formatAngle, withUnit } from "~/lib/format";
import { compareTorsions, OutsideComparer } from "~/lib/outside/compare-outside";
import { inEnsembleOrder } from "~/lib/outside/ensemble-order";
import { type AtomSet, makeGraph, selectAtoms } from "~/lib/structure";
import type { HydrogenMode, ViewMode } from "~/lib/url-state";
import type { Ghost } from "~/lib/view/ghost";
import type { ViewConformer } from "~/lib/view/scene";
import { type Comparison, useComparison } from "./use-comparison";

const NOTHING = { strong: "Nothing laid over", rest: "choose or add a structure" };
const MODES = [
  { value: "overlay", label: "Overlay" },
  { value: "side", label: "Side by side" },
  { value: "one", label: "Alone" },
] as const;
/** A structure has no hydrogens to draw that it does not show. */
const DRAWN: Record<AtomSet, HydrogenMode> = { heavy: "none", "heavy+polarH": "polar", all: "all" };
const NAME_LENGTH = 28;

/**
 * The view beside the comparison: a conformer in atom colours with the outside structure dashed over it, the two side by
 * side, or the structure alone.
 */
export function OutsideViewPanel() {
  const { ensemble, state, change, coordinates, anchor, rows } = useWorkbench();
  const comparison = useComparison();
  const { laid, error } = useLaid(comparison);
  const mode: ViewMode = comparison === null ? "one" : state.mode;
  const most = comparison === null || mode === "overlay" ? "all" : DRAWN[comparison.structure.data.atoms];
  const lowest = rows[0] ? coordinates.positions.get(rows[0].frame) : undefined;
  const conformers = useMemo<ViewConformer[]>(() => {
    if (comparison !== null) return laid === null ? [] : conformersOf(comparison, laid, mode);
    if (lowest === undefined || rows[0] === undefined) return [];
    const { frame, name, population } = rows[0];
    return [{ frame, name, population, positions: lowest, selected: true }];
  }, [comparison, laid, mode, lowest, rows]);
  const picked = state.atoms.filter(
    (atom) =>
      atom < ensemble.atoms &&
      (mode === "overlay" ||
        (comparison?.structure.data.map[atom] ?? 0) >= 0 ||
        ensemble.elements[atom] !== 1),
  );
  return (
    <>
      <Viewer
        elements={ensemble.elements}
        bonds={ensemble.bonds}
        conformers={conformers}
        anchor={anchor === null ? null : (coordinates.positions.get(anchor) ?? null)}
        alignOn={state.align}
        picked={picked}
        onPick={(atoms) => change({ atoms })}
        hydrogens={state.hydrogens}
        mostHydrogens={most}
        mode={mode}
        modes={comparison === null ? [] : MODES}
        onMode={(next) => change({ mode: next })}
        onHydrogens={(hydrogens) => change({ hydrogens })}
        caption={comparison === null ? NOTHING : captionOf(comparison, mode)}
        measures={[]}
        title={ensemble.name}
        {...(laid !== null && mode === "overlay" ? { ghost: laid.ghost } : {})}
      />
      {error ? (
        <Note tone="danger" className="mt-3">
          The structures did not arrive. Reload the page.
        </Note>
      ) : null}
    </>
  );
}

interface Laid {
  conformer: Float64Array;
  /** The structure in the atom order in which it lies best, reflected where its mirror image is the nearer one. */
  fitted: Float64Array;
  ghost: Ghost;
}

/** The conformer that is laid over and the structure on it, once the coordinates are here. */
function useLaid(comparison: Comparison | null): { laid: Laid | null; error: Error | null } {
  const { ensemble } = useWorkbench();
  const over = comparison?.over ?? null;
  const frames = useMemo(() => (over === null ? [] : [over.frame]), [over]);
  const { positions, error } = useCoordinates(ensemble.id, ensemble.atoms, frames);
  const graph = useMemo(
    () => makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds),
    [ensemble.elements, ensemble.bonds],
  );
  const data = comparison?.structure.data ?? null;
  const set = comparison?.set ?? "heavy";
  const comparer = useMemo(
    () =>
      data === null
        ? null
        : new OutsideComparer(graph, { positions: inEnsembleOrder(data), atoms: data.atoms }, set),
    [graph, data, set],
  );
  const conformer = over === null ? undefined : positions.get(over.frame);
  const mirror = over?.mirror ?? false;
  const laid = useMemo(() => {
    if (conformer === undefined || comparer === null || data === null) return null;
    const fitted = comparer.fit(conformer, mirror);
    const atoms = selectAtoms(graph, set);
    const shown = new Set(selectAtoms(graph, data.atoms));
    const bonds: number[] = [];
    for (let k = 0; k < graph.bonds.length; k += 2) {
      const [a = 0, b = 0] = [graph.bonds[k], graph.bonds[k + 1]];
      if (shown.has(a) && shown.has(b)) bonds.push(a, b);
    }
    return { conformer, fitted, ghost: { positions: fitted, atoms, bonds } };
  }, [conformer, comparer, data, graph, set, mirror]);
  return { laid, error };
}

function conformersOf({ over, structure }: Comparison, laid: Laid, mode: ViewMode): ViewConformer[] {
  const { frame, name, population } = over;
  const conformer = { frame, name, population, positions: laid.conformer, selected: true };
  const outside: ViewConformer = {
    frame: 0,
    name: shortName(structure.name),
    positions: laid.fitted,
    population: null,
    selected: true,
    tone: "outside",
  };
  if (mode === "overlay") return [conformer];
  return mode === "side" ? [conformer, outside] : [outside];
}

function shortName(name: string): string {
  const letters = [...name];
  return letters.length <= NAME_LENGTH ? name : `${letters.slice(0, NAME_LENGTH - 1).join("")}…`;
}

function captionOf(comparison: Comparison, mode: ViewMode): ViewerProps["caption"] {
  const { over, structure, set } = comparison;
  const name = shortName(structure.name);
  const hand = over.mirror ? " as its mirror image" : "";
  if (mode === "one") return { strong: name, rest: `alone${hand}` };
  const how = mode === "side" ? `and ${name}${hand}` : `in atom colours, ${name} dashed${hand}`;
  const words = set === "heavy" ? "heavy atoms" : set === "all" ? "all atoms" : "heavy atoms and polar H";
  return { strong: over.name, rest: `${how}; ${words}, RMSD ${withUnit(fixed(over.rmsd, 3), "Å")}` };
}

/** That it takes no part, and the torsions of the structure beside those of the conformer: read without script, too. */
export function OutsideTorsions() {
  const { ensemble } = useWorkbench();
  const comparison = useComparison();
  const { laid } = useLaid(comparison);
  const torsions = useMemo(() => {
    if (comparison === null) return [];
    const { fits, over, torsionAtoms } = comparison;
    const known = fits.find(({ frame }) => frame === over.frame);
    if (known) return known.torsions;
    return laid === null ? [] : compareTorsions(torsionAtoms, laid.conformer, laid.fitted, over.mirror);
  }, [comparison, laid]);
  return (
    <>
      <Note tone="mark" className="mt-4">
        An outside structure is laid against the ensemble and kept beside it. It takes no part in populations,
        averages or coverage.
      </Note>
      {comparison !== null && torsions.length > 0 ? (
        <Table aria-label={`Torsions of ${ensemble.name}`} className="mt-3">
          <thead>
            <tr>
              <Th>Torsion</Th>
              <Th align="right" unit="°">
                outside
              </Th>
              <Th align="right" unit="°">
                {comparison.over.name}
              </Th>
              <Th align="right" unit="°">
                apart
              </Th>
            </tr>
          </thead>
          <tbody>
            {torsions.map((torsion, k) => (
              <Tr key={comparison.labels[k]}>
                <Td>{comparison.labels[k]}</Td>
                <Td align="right">{formatAngle(torsion.outside)}</Td>
                <Td align="right">{formatAngle(torsion.conformer)}</Td>
                <Td align="right">{formatAngle(torsion.apart)}</Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      ) : null}
    </>
  );
}
