import { Download } from "lucide-react";
import { useState } from "react";
import { href } from "react-router";
import { buttonClass } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { PopulationBar } from "~/components/workbench/population-bar";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { fixed, formatAngle, formatEnergy, formatPopulation, formatRmsd } from "~/lib/format";
import { type OutsideChoice, writeOutsideChoice } from "~/lib/outside/choice";
import { searchOf } from "~/lib/url-state";
import type { Comparison } from "./use-comparison";

const FEW = 6;
const MANY = 100;

/** The conformers nearest to the outside structure. */
export function NearestTable({
  comparison,
  choice,
  onOver,
}: {
  comparison: Comparison;
  choice: OutsideChoice;
  onOver: (frame: number) => void;
}) {
  const { near: rows, over, labels, fits, structure } = comparison;
  const [all, setAll] = useState(false);
  const within = rows.filter((row) => row.rmsd <= choice.near).length;
  const most = all ? MANY : Math.max(FEW, Math.min(within, 12));
  const shown = rows.slice(0, most);
  const torsionsOf = new Map(fits.map(({ frame, torsions }) => [frame, torsions]));
  const worst = shown.map(({ frame }) => largest(torsionsOf.get(frame) ?? []));
  const widest = rows.reduce((top, row) => Math.max(top, row.population ?? 0), 0);
  const rest = rows.slice(shown.length);
  return (
    <div className="mt-9">
      <BlockHead title="Nearest conformers">
        <NearestCsv structure={structure.id} choice={choice} />
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
            <Th className="noscript:hidden print:hidden">
              <span className="sr-only">Lay over</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {shown.map((row, k) => (
            <Tr key={row.index} selected={row.frame === over.frame}>
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
                  <span className="w-20 max-xl:hidden">
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
              <Td align="right" className="noscript:hidden print:hidden">
                {row.frame === over.frame ? (
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
          {all ? (
            "The CSV has them all."
          ) : (
            <TextButton className="noscript:hidden print:hidden" onClick={() => setAll(true)}>
              Show more
            </TextButton>
          )}
        </p>
      ) : null}
    </div>
  );
}

/** The server writes it, so that it comes without script, too, and with every digit. */
function NearestCsv({ structure, choice }: { structure: string; choice: OutsideChoice }) {
  const { sift, state } = useWorkbench();
  if (sift === null) return null;
  const params = writeOutsideChoice({ ...choice, outside: structure, over: null }, new URLSearchParams());
  params.set("temperature", String(state.temperatureK));
  params.set("weights", state.weights);
  const address = href("/files/sifts/:id/outside.csv", { id: sift.id });
  return (
    <a className={buttonClass({ size: "sm" })} href={`${address}${searchOf(params)}`} download>
      <Download aria-hidden="true" />
      CSV
    </a>
  );
}

function largest(torsions: readonly { apart: number | null }[]): { at: number; apart: number } | null {
  let found: { at: number; apart: number } | null = null;
  for (const [at, { apart }] of torsions.entries()) {
    if (apart !== null && (found === null || apart > found.apart)) found = { at, apart };
  }
  return found;
}
