import { RuleName } from "~/components/averages/rule-name";
import { Badge } from "~/components/ui/badge";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { EditionView } from "~/lib/edition/views";
import { whyNoAverage } from "~/lib/edition/why-no-average";
import { fixed, formatCount, formatEnergy, formatPercent, formatTemperature, withUnit } from "~/lib/format";
import { EditionHead } from "./edition-head";

/** Decimals that show a value beside its spread or its uncertainty. */
export function digitsFor(scatter: number | null, value: number | null): number {
  const scale = scatter !== null && scatter > 0 ? scatter : Math.abs(value ?? 1) / 100;
  return Math.min(4, Math.max(0, 2 - Math.floor(Math.log10(scale || 1)) - 1));
}

/** Weighted averages of the properties with their uncertainty; rule and name never part. */
export function AveragesTable({ edition }: { edition: EditionView }) {
  const { averages, temperature, uncertainty } = edition;
  if (averages === null || averages.length === 0 || temperature === null) return null;
  const drawn = uncertainty !== null && uncertainty.averageDraws > 0;
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
            {drawn ? (
              <>
                <Th align="right" unit="level error">
                  ±
                </Th>
                <Th align="right" className="max-sm:hidden">
                  95 % range
                </Th>
              </>
            ) : null}
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
            const error = row.error ?? null;
            return (
              <Tr key={k} className="figures">
                <Td wrap className="[overflow-wrap:anywhere]">
                  {row.property}
                  {edition.counting.includes(row.property) ? (
                    <span className="block text-xs text-ink-3">counts the frames up: may be a label</span>
                  ) : null}
                  {row.average === null ? (
                    <span className="block text-xs text-ink-2">{whyNoAverage(row)}</span>
                  ) : null}
                  <span className="block text-xs text-ink-3 sm:hidden">
                    <RuleName rule={row.rule} />
                    {row.unit ? `, in ${row.unit}` : ""}
                  </span>
                </Td>
                <Td className="text-ink-2 max-sm:hidden">
                  <RuleName rule={row.rule} />
                </Td>
                <Td align="right">{fixed(row.average, digits)}</Td>
                {drawn ? (
                  <>
                    <Td align="right">{error ? fixed(error.sd, digits) : "–"}</Td>
                    <Td align="right" className="text-ink-2 max-sm:hidden">
                      {error === null || error.low === null || error.high === null
                        ? "–"
                        : `${fixed(error.low, digits)} to ${fixed(error.high, digits)}`}
                    </Td>
                  </>
                ) : null}
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
      {drawn ? (
        <p className="figures mt-2 max-w-read text-xs text-ink-3">
          ± is one standard deviation over {formatCount(uncertainty.averageDraws)} draws with an error of{" "}
          {withUnit(formatEnergy(uncertainty.sigma), "kcal/mol")} in each energy; the spread is how much the
          shapes differ, which no better level takes away.
        </p>
      ) : null}
    </section>
  );
}
