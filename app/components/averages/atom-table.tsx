import { Download } from "lucide-react";
import { useState } from "react";
import { saveText } from "~/components/charts/export-figure";
import { Button } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { digitsFor } from "~/lib/averages/words";
import { atomName } from "~/lib/chem/elements";
import { ABSENT, fixed, formatTemperature, plural, signed } from "~/lib/format";
import { toCsv } from "~/lib/workbench/tsv";
import { AtomDrawing } from "./atom-drawing";
import { MeasuredBlock } from "./measured-block";
import { anchorOf } from "./property-table";
import { type Averaged, type AveragedProperty, contributionsTo } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

/** A per-atom quantity: equivalent atoms share a row, beside the drawing that shows which they are. */
export function AtomTable({
  quantity,
  list,
  averaged,
  weighed,
}: {
  quantity: string;
  /** One a group of equivalent atoms. */
  list: readonly AveragedProperty[];
  averaged: Averaged;
  weighed: WeighedConformers;
}) {
  const { ensemble, temperatureK, coordinates, result } = useWorkbench();
  const [chosen, setChosen] = useState<string | null>(null);
  const unit = list[0]?.property.unit ?? null;
  const lowest = result?.kept[0]?.frame;
  const positions = lowest === undefined ? null : (coordinates.positions.get(lowest) ?? null);
  const rows = list.map((one) => {
    const { mover } = contributionsTo(one, weighed, averaged.populations, temperatureK);
    const digits = Math.max(2, digitsFor(unit, one.average.value));
    return { one, mover, digits, name: groupName(one.property.atoms ?? [], ensemble.elements) };
  });
  const picked = rows.find((row) => row.one.property.id === chosen)?.one.property.atoms ?? [];
  const merged = rows.filter((row) => (row.one.property.atoms ?? []).length > 1);
  const atoms = rows.reduce((total, row) => total + (row.one.property.atoms ?? []).length, 0);
  const save = () =>
    saveText(
      `${anchorOf(quantity)}.csv`,
      "text/csv",
      toCsv(
        [
          "atoms",
          ...averaged.temperatures.map(
            (kelvin) => `${formatTemperature(kelvin)} K${unit ? ` [${unit}]` : ""}`,
          ),
          "uncertainty",
          "spread",
          "covered",
        ],
        rows.map(({ one, name }) => [
          name,
          ...one.averages.map((average) => average.value),
          one.error?.sd ?? null,
          one.average.spread,
          one.average.covered,
        ]),
      ),
    );
  return (
    <section id={anchorOf(quantity)} className="mt-9 scroll-mt-24">
      <BlockHead title={`${quantity}, ${plural(rows.length, "group")} of ${plural(atoms, "atom")}`}>
        <Button size="sm" icon={<Download aria-hidden="true" />} onClick={save}>
          CSV
        </Button>
      </BlockHead>
      <div className="grid gap-x-8 gap-y-4 xl:grid-cols-[19rem_minmax(0,1fr)]">
        <div className="min-w-0">
          <AtomDrawing
            elements={ensemble.elements}
            bonds={ensemble.bonds}
            positions={positions}
            table={ensemble.bondTable}
            numbers={new Set(rows.flatMap((row) => row.one.property.atoms ?? []))}
            ringed={new Set(picked)}
            name={ensemble.name}
          />
          <p className="mt-2 max-w-read text-xs text-ink-3">
            {merged.length > 0
              ? `Equivalent atoms give one signal (${merged[0]?.name}${merged.length > 1 ? ` and ${plural(merged.length - 1, "further group")}` : ""}): their values are averaged in each conformer before the conformers are. `
              : "No two of these atoms are equivalent. "}
            Equivalent are atoms that an exchange carries into each other with the hand of every centre and
            the sides of every double bond kept
            {ensemble.chirality === "achiral" ? ", or every hand turned, as the molecule is achiral." : "."}{" "}
            Hydrogens of a CH<sub>2</sub> beside a stereocentre stay apart.
          </p>
        </div>
        <Table aria-label={`${quantity} by atom`} className="figures">
          <thead>
            <tr>
              <Th>Atoms</Th>
              {averaged.temperatures.map((kelvin, k) => (
                <Th
                  key={kelvin}
                  align="right"
                  unit={unit ?? undefined}
                  className={k === averaged.here ? "text-ink!" : "max-sm:hidden"}
                >
                  {formatTemperature(kelvin)} K
                </Th>
              ))}
              <Th align="right" unit={unit ?? undefined}>
                Uncertainty
              </Th>
              <Th align="right" unit={unit ?? undefined} className="max-lg:hidden">
                Spread
              </Th>
              <Th align="right" unit="change without it" className="max-sm:hidden">
                Most moved by
              </Th>
            </tr>
          </thead>
          <tbody>
            {rows.map(({ one, mover, digits, name }) => (
              <Tr key={one.property.id} selected={one.property.id === chosen}>
                <Td wrap>
                  <button
                    type="button"
                    aria-pressed={one.property.id === chosen}
                    className="rounded-sm text-left font-semibold hover:underline pointer-coarse:min-h-11"
                    onClick={() => setChosen(one.property.id === chosen ? null : one.property.id)}
                  >
                    {name}
                  </button>
                </Td>
                {one.averages.map((average, k) => (
                  <Td
                    key={averaged.temperatures[k]}
                    align="right"
                    className={k === averaged.here ? "" : "text-ink-2 max-sm:hidden"}
                  >
                    {fixed(average.value, digits)}
                  </Td>
                ))}
                <Td align="right">
                  {one.error === null || one.average.value === null
                    ? ABSENT
                    : `± ${fixed(one.error.sd, digits)}`}
                </Td>
                <Td align="right" className="max-lg:hidden">
                  {fixed(one.average.spread, digits)}
                </Td>
                <Td align="right" className="max-sm:hidden">
                  {mover === null ? (
                    ABSENT
                  ) : Math.abs(mover.change) < 0.5 * 10 ** -digits ? (
                    <span className="text-ink-3">below {fixed(10 ** -digits, digits)}</span>
                  ) : (
                    `${mover.name}, ${signed(mover.change, digits)}`
                  )}
                </Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      </div>
      <MeasuredBlock quantity={quantity} list={list} />
    </section>
  );
}

function groupName(atoms: readonly number[], elements: readonly number[]): string {
  return atoms.map((atom) => atomName(elements, atom)).join(", ");
}
