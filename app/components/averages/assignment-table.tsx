import { Segments } from "~/components/ui/segments";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { PairAssignment } from "~/lib/averages/assignment";
import { symbolOf } from "~/lib/chem/elements";
import { fixed } from "~/lib/format";

/** Pairs that could be assigned either way: the errors of both assignments, and which was chosen. */
export function AssignmentTable({
  pairs,
  unit,
  nameOf,
  onChoose,
}: {
  pairs: readonly PairAssignment[];
  unit: string | null;
  nameOf: (atom: number) => string;
  onChoose: (atom: number, swapped: boolean) => void;
}) {
  if (pairs.length === 0) return null;
  const shown = unit ?? undefined;
  const closer = pairs.filter(
    ({ swapped, entered, exchanged }) =>
      (swapped ? entered.pairMad - exchanged.pairMad : exchanged.pairMad - entered.pairMad) < 0,
  ).length;
  return (
    <section aria-label="Assignments">
      <h4 className="font-semibold">Pairs that could be assigned either way</h4>
      <p className="mt-1 mb-3 max-w-read text-ink-2">
        The bonds do not tell these atoms apart: hydrogens or groups at a prochiral centre, and parts of a
        group taken apart by hand. Unless the experiment assigned them, the closer one is no proof.{" "}
        {closer === 0
          ? "No pair comes closer by the other assignment."
          : closer === 1
            ? "One pair comes closer by the other assignment."
            : `${closer} pairs come closer by the other assignment.`}
      </p>
      <Table aria-label="Both assignments of each pair" className="figures">
        <thead>
          <tr>
            <Th>Pair</Th>
            <Th align="right" unit={shown}>
              As entered
            </Th>
            <Th align="right" unit={shown}>
              Swapped
            </Th>
            <Th align="right" unit={shown} className="max-sm:hidden">
              MAE of the nucleus, as entered
            </Th>
            <Th align="right" unit={shown} className="max-sm:hidden">
              Swapped
            </Th>
            <Th>Chosen</Th>
          </tr>
        </thead>
        <tbody>
          {pairs.map(({ atoms: [a, b], z, swapped, entered, exchanged }) => {
            const name = `${nameOf(a)} and ${nameOf(b)}`;
            return (
              <Tr key={a}>
                <Td wrap className="font-semibold">
                  {name}
                  <span className="sr-only">, {symbolOf(z)}</span>
                </Td>
                <Td align="right" className={swapped ? "text-ink-2" : "font-medium"}>
                  {fixed(entered.pairMad, 2)}
                </Td>
                <Td align="right" className={swapped ? "font-medium" : "text-ink-2"}>
                  {fixed(exchanged.pairMad, 2)}
                </Td>
                <Td align="right" className="text-ink-2 max-sm:hidden">
                  {fixed(entered.nucleus.mad, 2)}
                </Td>
                <Td align="right" className="text-ink-2 max-sm:hidden">
                  {fixed(exchanged.nucleus.mad, 2)}
                </Td>
                <Td className="py-1">
                  <Segments
                    label={`Assignment of ${name}`}
                    hideLabel
                    size="sm"
                    value={swapped ? "swapped" : "entered"}
                    options={[
                      { value: "entered", label: "As entered" },
                      { value: "swapped", label: "Swapped" },
                    ]}
                    onChange={(chosen) => onChoose(a, chosen === "swapped")}
                  />
                  <span className="hidden print:inline">{swapped ? "swapped" : "as entered"}</span>
                </Td>
              </Tr>
            );
          })}
        </tbody>
      </Table>
      <p className="mt-2 max-w-read text-xs text-ink-3">
        Errors are the mean absolute deviation of the two values; lines fitted to measured values are fitted
        anew for each assignment.
      </p>
    </section>
  );
}
