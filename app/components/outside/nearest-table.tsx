import { useMemo, useState } from "react";
import { saveText } from "~/components/charts/export-figure";
import { Button } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { PopulationBar } from "~/components/workbench/population-bar";
import { fixed, formatAngle, formatEnergy, formatPopulation, formatRmsd } from "~/lib/format";
import type { TorsionApart } from "~/lib/outside/compare-outside";
import type { OutsideRow } from "~/lib/outside/finding";
import { toCsv } from "~/lib/workbench/tsv";

const FEW = 6;
const MANY = 100;

/** The conformers nearest to the outside structure. */
export function NearestTable({
  rows,
  over,
  near,
  fitOf,
  labels,
  onOver,
}: {
  /** Nearest first. */
  rows: readonly OutsideRow[];
  over: OutsideRow | null;
  near: number;
  fitOf: (row: OutsideRow) => { torsions: readonly TorsionApart[] } | null;
  labels: readonly string[];
  onOver: (frame: number) => void;
}) {
  const [all, setAll] = useState(false);
  const within = rows.filter((row) => row.rmsd <= near).length;
  const most = all ? MANY : Math.max(FEW, Math.min(within, 12));
  const shown = useMemo(() => rows.slice(0, most), [rows, most]);
  const worst = useMemo(() => shown.map((row) => largest(fitOf(row)?.torsions ?? [])), [shown, fitOf]);
  const widest = rows.reduce((top, row) => Math.max(top, row.population ?? 0), 0);
  const rest = rows.slice(shown.length);
  return (
    <div className="mt-9">
      <BlockHead title="Nearest conformers">
        <Button size="sm" onClick={() => saveText("nearest-conformers.csv", "text/csv", csvOf(rows))}>
          CSV
        </Button>
      </BlockHead>
      <Table aria-label="Conformers nearest to the outside structure">
        <thead>
          <tr>
            <Th>Conformer</Th>
            <Th align="right" unit="Å" sort="up">
              RMSD
            </Th>
            <Th className="max-xl:hidden">As</Th>
            <Th align="right" unit="RMSD, Å" className="max-xl:hidden">
              Other hand
            </Th>
            <Th align="right" unit="kcal/mol">
              Relative energy
            </Th>
            <Th unit="%">Population</Th>
            <Th align="right" unit="°" className="max-sm:hidden">
              Largest torsion apart
            </Th>
            <Th>
              <span className="sr-only">Lay over</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {shown.map((row, k) => (
            <Tr key={row.index} selected={row.frame === over?.frame}>
              <Td>
                <b className="font-semibold">{row.name}</b>
              </Td>
              <Td align="right">
                {row.exact ? "" : "to "}
                {formatRmsd(row.rmsd)}
              </Td>
              <Td className="max-xl:hidden">{row.mirror ? "mirror image" : "same hand"}</Td>
              <Td align="right" className="max-xl:hidden">
                {formatRmsd(row.otherHand)}
              </Td>
              <Td align="right">{formatEnergy(row.relativeEnergy)}</Td>
              <Td>
                <span className="flex items-center gap-3">
                  <span className="figures w-9 text-right">{formatPopulation(row.population)}</span>
                  <span className="w-20 max-sm:hidden">
                    {row.population === null ? null : (
                      <PopulationBar population={row.population} widest={widest} />
                    )}
                  </span>
                </span>
              </Td>
              <Td align="right" className="max-sm:hidden">
                {formatAngle(worst[k]?.apart)}{" "}
                <span className="text-ink-3">{labels[worst[k]?.at ?? -1] ?? ""}</span>
              </Td>
              <Td align="right">
                {row.frame === over?.frame ? (
                  <span className="text-ink-3">shown</span>
                ) : (
                  <TextButton onClick={() => onOver(row.frame)}>
                    Lay over<span className="sr-only"> {row.name}</span>
                  </TextButton>
                )}
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      {rest.length > 0 ? (
        <p className="mt-2 text-xs text-ink-3">
          {rest.length} more, {fixed(rest[0]?.rmsd, 1)} to {fixed(rest.at(-1)?.rmsd, 1)} Å away.{" "}
          {all ? "The CSV has them all." : <TextButton onClick={() => setAll(true)}>Show more</TextButton>}
        </p>
      ) : null}
    </div>
  );
}

function largest(torsions: readonly TorsionApart[]): { at: number; apart: number } | null {
  let found: { at: number; apart: number } | null = null;
  for (const [at, { apart }] of torsions.entries()) {
    if (apart !== null && (found === null || apart > found.apart)) found = { at, apart };
  }
  return found;
}

function csvOf(rows: readonly OutsideRow[]): string {
  return toCsv(
    [
      "conformer",
      "frame",
      "RMSD [Å]",
      "as",
      "other hand RMSD [Å]",
      "relative energy [kcal/mol]",
      "population",
    ],
    rows.map((row) => [
      row.name,
      row.frame,
      row.rmsd,
      row.mirror ? "mirror image" : "same hand",
      row.otherHand,
      row.relativeEnergy,
      row.population,
    ]),
  );
}
