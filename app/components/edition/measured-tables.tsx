import { BreakableName } from "~/components/ui/level-marker";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { asideWords } from "~/lib/averages/measured";
import { agreementWords, assignmentWords, scalingWords, unitWords } from "~/lib/averages/measured-words";
import { asTyped, digitsFor } from "~/lib/averages/words";
import { symbolOf } from "~/lib/chem/elements";
import { atomNames, type EditionMeasured, setAsideIn } from "~/lib/edition/measured";
import { agreementFigures, type EditionFigures } from "~/lib/edition/measured-figures";
import type { EditionView } from "~/lib/edition/views";
import { ABSENT, fixed, formatTemperature, signed } from "~/lib/format";
import { EditionHead } from "./edition-head";

/** Averages beside what was measured, each nucleus by itself, with the assignments chosen. */
export function MeasuredTables({ edition }: { edition: EditionView }) {
  const { measured, measuredProperties: figures, temperature } = edition;
  const any = measured.length > 0 || (figures !== null && figures.rows.length > 0);
  if (!any || temperature === null) return null;
  return (
    <section className="mt-10" aria-labelledby="edition-measured">
      <EditionHead id="edition-measured">
        Against experiment, averages at {formatTemperature(temperature)} K
      </EditionHead>
      {measured.map((one) => (
        <Quantity key={one.quantity} measured={one} elements={edition.ensemble.elements} />
      ))}
      {figures && figures.rows.length > 0 ? <Properties figures={figures} /> : null}
    </section>
  );
}

function Properties({ figures: { rows, units } }: { figures: EditionFigures }) {
  return (
    <div className="mt-4">
      <h3 className="text-sm font-semibold">Properties</h3>
      {units.map(({ unit, agreement }) => (
        <p key={unit} className="keep figures mt-2 max-w-read">
          <b>{unit}</b> {unitWords(agreementFigures(agreement), unit, agreement.maxAt)}
        </p>
      ))}
      <Table aria-label="Properties beside measured values" className="figures mt-3">
        <thead>
          <tr>
            <Th>Property</Th>
            <Th align="right">Average</Th>
            <Th align="right" unit="level error" className="max-sm:hidden">
              ±
            </Th>
            <Th align="right">Measured</Th>
            <Th align="right">Difference</Th>
            <Th>Unit</Th>
          </tr>
        </thead>
        <tbody>
          {rows.map(({ property, unit, average, error, measured, difference }) => {
            const digits = digitsFor(unit, average);
            return (
              <Tr key={property}>
                <Td wrap className="font-medium">
                  <BreakableName name={property} />
                </Td>
                <Td align="right">{fixed(average, digits)}</Td>
                <Td align="right" className="max-sm:hidden">
                  {fixed(error, digits)}
                </Td>
                <Td align="right">{asTyped(measured, digits)}</Td>
                <Td align="right">{difference === null ? ABSENT : signed(difference, digits)}</Td>
                <Td className="text-ink-2">{unit ?? ""}</Td>
              </Tr>
            );
          })}
        </tbody>
      </Table>
    </div>
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
              agreementFigures(agreement),
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
