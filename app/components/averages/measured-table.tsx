import { NumberField } from "~/components/ui/number-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { Nucleus } from "~/lib/averages/measured";
import { ABSENT, fixed, formatTemperature, signed } from "~/lib/format";

/** A group a row: what is computed, what was measured, and the difference. */
export function MeasuredTable({
  nuclei,
  shieldings,
  unit,
  kind,
  nameOf,
  set,
  swapped,
  entered,
  temperatureK,
}: {
  nuclei: readonly Nucleus[];
  shieldings: boolean;
  unit: string | null;
  kind: string;
  nameOf: (atom: number) => string;
  set: (atom: number, value: number | null) => void;
  /** First atoms of the groups whose value is that of their partner. */
  swapped: ReadonlySet<number>;
  /** As they were entered. */
  entered: ReadonlyMap<number, number>;
  temperatureK: number;
}) {
  const shown = unit ?? undefined;
  return (
    <Table aria-label={`${kind} beside measured values`} className="figures">
      <thead>
        <tr>
          <Th>Atoms</Th>
          {shieldings ? (
            <Th align="right" unit={shown} className="max-sm:hidden">
              Shielding
            </Th>
          ) : null}
          <Th align="right" unit={shown}>
            {shieldings ? "Shift" : "Average"}, {formatTemperature(temperatureK)} K
          </Th>
          <Th align="right" unit={shown} className="max-sm:hidden">
            Uncertainty
          </Th>
          <Th unit={shown}>Measured</Th>
          <Th align="right" unit={shown}>
            Difference
          </Th>
        </tr>
      </thead>
      <tbody>
        {nuclei.flatMap(({ groups }) =>
          groups.map((group) => (
            <Tr key={group.atom}>
              <Td wrap className="font-semibold">
                {nameOf(group.atom)}
              </Td>
              {shieldings ? (
                <Td align="right" className="text-ink-2 max-sm:hidden">
                  {fixed(group.average, 2)}
                </Td>
              ) : null}
              <Td align="right">{fixed(group.computed, 2)}</Td>
              <Td align="right" className="max-sm:hidden">
                {group.computedError === null ? ABSENT : `± ${fixed(group.computedError, 2)}`}
              </Td>
              <Td className="py-1">
                <span className="hidden print:inline">
                  {group.measured === null ? ABSENT : fixed(group.measured, 2)}
                </span>
                <NumberField
                  label={`Measured, ${nameOf(group.atom)}`}
                  hideLabel
                  className="w-24 print:hidden"
                  value={entered.get(group.atom) ?? null}
                  optional
                  write={(value) => fixed(value, 2)}
                  wrong="A number such as 77.30."
                  onCommit={(value) => set(group.atom, value)}
                />
                {swapped.has(group.atom) ? (
                  <span className="block text-xs text-ink-3">
                    swapped: taken as {fixed(group.measured, 2)}
                  </span>
                ) : null}
              </Td>
              <Td align="right">{group.difference === null ? ABSENT : signed(group.difference, 2)}</Td>
            </Tr>
          )),
        )}
      </tbody>
    </Table>
  );
}
