import { Table, Td, Th, Tr } from "~/components/ui/table";
import { asideWords } from "~/lib/averages/measured";
import { agreementWords, assignmentWords, scalingWords } from "~/lib/averages/measured-words";
import { symbolOf } from "~/lib/chem/elements";
import { atomNames, type EditionMeasured, setAsideIn } from "~/lib/edition/measured";
import type { EditionView } from "~/lib/edition/views";
import { ABSENT, fixed, formatTemperature, signed } from "~/lib/format";
import { EditionHead } from "./edition-head";

/** Averages beside what was measured, each nucleus by itself, with the assignments chosen. */
export function MeasuredTables({ edition }: { edition: EditionView }) {
  const { measured, temperature } = edition;
  if (measured.length === 0 || temperature === null) return null;
  return (
    <section className="mt-10" aria-labelledby="edition-measured">
      <EditionHead id="edition-measured">
        Against experiment, averages at {formatTemperature(temperature)} K
      </EditionHead>
      {measured.map((one) => (
        <Quantity key={one.quantity} measured={one} elements={edition.ensemble.elements} />
      ))}
    </section>
  );
}

function Quantity({ measured, elements }: { measured: EditionMeasured; elements: readonly number[] }) {
  const { quantity, unit, shieldings, nuclei, pairs } = measured;
  const groups = new Map(nuclei.flatMap((one) => one.groups.map(({ atoms }) => [atoms[0] ?? 0, atoms])));
  const nameOf = (atom: number) => atomNames(elements, groups.get(atom) ?? [atom]);
  const shown = unit ?? undefined;
  const aside = setAsideIn(measured);
  return (
    <div className="mt-4">
      <h3 className="text-sm font-semibold">{quantity}</h3>
      {nuclei.map(({ z, agreement, line }) =>
        agreement === null ? null : (
          <p key={z} className="keep figures mt-2 max-w-read">
            <b>{symbolOf(z)}</b>{" "}
            {agreementWords(
              {
                ...{ n: agreement.n, mad: agreement.mae, rmsd: agreement.rmse, max: agreement.max },
                corrected: agreement.corrected && {
                  line: { slope: agreement.corrected.m, intercept: agreement.corrected.b, n: agreement.n },
                  mad: agreement.corrected.mae,
                },
              },
              unit,
              nameOf(agreement.maxAt),
              line?.from === "fitted",
            )}
            {line ? ` ${scalingWords(line)}` : ""}
          </p>
        ),
      )}
      {aside.length > 0 ? (
        <p className="keep figures mt-2 max-w-read text-ink-2">
          {asideWords(aside, (atom) => atomNames(elements, [atom]), shieldings ? "ppm" : unit)}
        </p>
      ) : null}
      {pairs.length > 0 ? (
        <p className="keep figures mt-2 max-w-read text-ink-2">
          Pairs that could be assigned either way.{" "}
          {pairs
            .map(({ atoms: [a = 0, b = 0], chosen, entered, swapped }) =>
              assignmentWords(
                `${nameOf(a)} and ${nameOf(b)}`,
                {
                  swapped: chosen === "swapped",
                  entered: { pairMad: entered.mae },
                  exchanged: { pairMad: swapped.mae },
                },
                unit,
              ),
            )
            .join(" ")}
        </p>
      ) : null}
      <Table aria-label={`${quantity} beside measured values`} className="figures mt-3">
        <thead>
          <tr>
            <Th>Atoms</Th>
            {shieldings ? (
              <Th align="right" unit={shown} className="max-sm:hidden">
                Shielding
              </Th>
            ) : null}
            <Th align="right" unit={shown}>
              {shieldings ? "Shift" : "Average"}
            </Th>
            <Th align="right" unit="level error" className="max-sm:hidden">
              ±
            </Th>
            <Th align="right" unit={shown}>
              Measured
            </Th>
            <Th align="right" unit={shown}>
              Difference
            </Th>
          </tr>
        </thead>
        <tbody>
          {nuclei.flatMap((nucleus) =>
            nucleus.groups.map((group) => (
              <Tr key={group.atoms[0]}>
                <Td wrap className="font-medium">
                  {atomNames(elements, group.atoms)}
                </Td>
                {shieldings ? (
                  <Td align="right" className="text-ink-2 max-sm:hidden">
                    {fixed(group.average, 2)}
                  </Td>
                ) : null}
                <Td align="right">{fixed(group.computed, 2)}</Td>
                <Td align="right" className="max-sm:hidden">
                  {fixed(group.error, 2)}
                </Td>
                <Td align="right">{fixed(group.measured, 2)}</Td>
                <Td align="right">{group.difference === null ? ABSENT : signed(group.difference, 2)}</Td>
              </Tr>
            )),
          )}
        </tbody>
      </Table>
    </div>
  );
}
