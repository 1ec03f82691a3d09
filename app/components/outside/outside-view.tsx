import { Note } from "~/components/ui/note";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { Viewer } from "~/components/viewer/viewer";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useOutsideShown } from "~/hooks/use-outside-view";
import { formatAngle } from "~/lib/format";

const NOTHING = { strong: "Nothing laid over", rest: "choose or add a structure" };

/** The view beside the comparison: a conformer in atom colours with the outside structure dashed over it. */
export function OutsideViewPanel() {
  const { ensemble, state, change, coordinates, rows } = useWorkbench();
  const shown = useOutsideShown();
  const lowest = rows[0] ? coordinates.positions.get(rows[0].frame) : undefined;
  const first = shown ?? (lowest && rows[0] ? { ...rows[0], positions: lowest } : null);
  return (
    <>
      <Viewer
        elements={ensemble.elements}
        bonds={ensemble.bonds}
        conformers={
          first === null
            ? []
            : [
                {
                  frame: first.frame,
                  name: first.name,
                  positions: first.positions,
                  population: first.population,
                  selected: true,
                },
              ]
        }
        alignOn={state.align}
        picked={state.atoms.filter((atom) => atom < ensemble.atoms)}
        onPick={(atoms) => change({ atoms })}
        hydrogens={state.hydrogens}
        mode="one"
        onMode={() => {}}
        onHydrogens={(hydrogens) => change({ hydrogens })}
        caption={shown?.caption ?? NOTHING}
        measures={[]}
        title={ensemble.name}
        {...(shown ? { ghost: shown.ghost } : {})}
      />
      <Note tone="mark" className="mt-4">
        An outside structure is laid against the ensemble and kept beside it. It takes no part in populations,
        averages or coverage.
      </Note>
      {shown !== null && shown.torsions.length > 0 ? (
        <Table aria-label="Torsions" className="mt-3">
          <thead>
            <tr>
              <Th>Torsion</Th>
              <Th align="right" unit="°">
                outside
              </Th>
              <Th align="right" unit="°">
                {shown.name}
              </Th>
              <Th align="right" unit="°">
                apart
              </Th>
            </tr>
          </thead>
          <tbody>
            {shown.torsions.map((torsion, k) => (
              <Tr key={torsion.atoms.join()}>
                <Td>{shown.labels[k]}</Td>
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
