import { RuleName } from "~/components/averages/rule-name";
import { Badge } from "~/components/ui/badge";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { EditionView } from "~/lib/edition/views";
import { fixed, formatPercent, formatTemperature } from "~/lib/format";
import { EditionHead } from "./edition-head";

/** Decimals that show a value beside its spread. */
function digitsFor(spread: number | null, value: number | null): number {
  const scale = spread !== null && spread > 0 ? spread : Math.abs(value ?? 1) / 100;
  return Math.min(4, Math.max(0, 2 - Math.floor(Math.log10(scale || 1)) - 1));
}

/** Weighted averages of the properties; rule and name never part. */
export function AveragesTable({ edition }: { edition: EditionView }) {
  const { averages, temperature } = edition;
  if (averages === null || averages.length === 0 || temperature === null) return null;
  return (
    <section className="mt-10" aria-labelledby="edition-averages">
      <EditionHead id="edition-averages">
        Averages over the ensemble at {formatTemperature(temperature)} K
      </EditionHead>
      <Table aria-labelledby="edition-averages" className="mt-3">
        <thead>
          <tr>
            <Th>Quantity</Th>
            <Th className="max-sm:hidden">Rule</Th>
            <Th align="right">Average</Th>
            <Th align="right" unit="of the shapes">
              Spread
            </Th>
            <Th align="right" className="max-sm:hidden">
              Covered
            </Th>
            <Th className="max-sm:hidden">Unit</Th>
          </tr>
        </thead>
        <tbody>
          {averages.map((row, k) => {
            const digits = digitsFor(row.spread, row.average);
            return (
              <Tr key={k} className="figures">
                <Td wrap className="[overflow-wrap:anywhere]">
                  {row.property}
                  <span className="block text-xs text-ink-3 sm:hidden">
                    <RuleName rule={row.rule} />
                    {row.unit ? `, in ${row.unit}` : ""}
                  </span>
                </Td>
                <Td className="text-ink-2 max-sm:hidden">
                  <RuleName rule={row.rule} />
                </Td>
                <Td align="right">{fixed(row.average, digits)}</Td>
                <Td align="right">{fixed(row.spread, digits)}</Td>
                <Td align="right" className="max-sm:hidden">
                  {row.covered < 1 ? <Badge>{formatPercent(row.covered, 1)}</Badge> : "all"}
                </Td>
                <Td className="text-ink-2 max-sm:hidden">{row.unit ?? ""}</Td>
              </Tr>
            );
          })}
        </tbody>
      </Table>
    </section>
  );
}
