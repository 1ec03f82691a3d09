import { Download } from "lucide-react";
import { Fragment, useState } from "react";
import { saveText } from "~/components/charts/export-figure";
import { Button } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { AveragesView, SaidView } from "~/lib/averages/averages-view";
import { carrierNames, digitsFor, signalName } from "~/lib/averages/words";
import { atomName } from "~/lib/chem/elements";
import { ABSENT, fixed, formatDate, formatTemperature, plural, signed } from "~/lib/format";
import { toCsv } from "~/lib/workbench/tsv";
import { AtomDrawing } from "./atom-drawing";
import { MeasuredBlock } from "./measured-block";
import { PropertyFigures } from "./property-figures";
import { anchorOf } from "./property-table";
import { JoinGroup, SplitGroup } from "./split-group";
import { type Averaged, type AveragedProperty, averageFacts, contributionsTo } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

/** A per-atom quantity: equivalent atoms share a row, beside the drawing that shows which they are. */
export function AtomTable({
  quantity,
  list,
  averaged,
  weighed,
  sigma,
  view,
}: {
  quantity: string;
  /** One a group of equivalent atoms. */
  list: readonly AveragedProperty[];
  averaged: Averaged;
  weighed: WeighedConformers;
  /** Error of the level, kcal/mol; null without one. */
  sigma: number | null;
  view: AveragesView;
}) {
  const { ensemble, temperatureK, coordinates, result } = useWorkbench();
  const [chosen, setChosen] = useState<string | null>(null);
  const unit = list[0]?.property.unit ?? null;
  const lowest = result?.kept[0]?.frame;
  const positions = lowest === undefined ? null : (coordinates.positions.get(lowest) ?? null);
  const rows = list.map((one) => {
    const { list: contributions, mover } = contributionsTo(one, weighed, averaged.populations, temperatureK);
    const digits = Math.max(2, digitsFor(unit, one.average.value));
    const members = one.property.atoms ?? [];
    const split = splitOf(view.said, members);
    return {
      one,
      contributions,
      mover,
      digits,
      members,
      split,
      name: signalName(members, ensemble.elements, ensemble.bonds),
      atoms: members.map((atom) => atomName(ensemble.elements, atom)).join(", "),
      carriers: carrierNames(members, ensemble.elements, ensemble.bonds),
    };
  });
  const apart = rows.filter((row) => row.split !== null);
  const picked = rows.find((row) => row.one.property.id === chosen)?.one.property.atoms ?? [];
  const merged = rows.filter((row) => (row.one.property.atoms ?? []).length > 1);
  const atoms = rows.reduce((total, row) => total + (row.one.property.atoms ?? []).length, 0);
  const own = ` at ${formatTemperature(temperatureK)} K${unit ? ` [${unit}]` : ""}`;
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
          `uncertainty${own}`,
          `spread${own}`,
          `covered at ${formatTemperature(temperatureK)} K`,
          "level",
          "weights",
          "sigma [kcal/mol]",
          "draws",
          "seed",
        ],
        rows.map(({ one, name }) => [
          name,
          ...one.averages.map((average) => average.value),
          one.error?.sd ?? null,
          one.average.spread,
          one.average.covered,
          weighed.level.name,
          weighed.weights.kind,
          averaged.draws === null ? null : sigma,
          averaged.draws,
          averaged.draws === null ? null : averaged.seed,
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
            Hydrogens of a CH<sub>2</sub> beside a stereocentre stay apart. Choose a row to see what makes its
            average{ensemble.mayCompute && merged.length > 0 ? ", or to take its atoms apart" : ""}.
            {apart.length > 0
              ? ` ${apart.map((row) => row.name).join("; ")}: taken apart by hand, each a signal of its own.`
              : ""}
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
              <Th align="right" unit={unit ?? undefined} className="max-lg:hidden print:table-cell!">
                Spread
              </Th>
              <Th align="right" unit="change without it" className="max-sm:hidden">
                Most moved by
              </Th>
            </tr>
          </thead>
          <tbody>
            {rows.map(({ one, contributions, mover, digits, name, atoms, carriers, members, split }) => (
              <Fragment key={one.property.id}>
                <Tr selected={one.property.id === chosen}>
                  <Td wrap>
                    <button
                      type="button"
                      className="rounded-sm text-left font-semibold hover:underline pointer-coarse:min-h-11"
                      aria-expanded={one.property.id === chosen}
                      onClick={() => setChosen(one.property.id === chosen ? null : one.property.id)}
                    >
                      {atoms}
                      {carriers ? (
                        <span className="block text-xs font-normal text-ink-3">on {carriers}</span>
                      ) : null}
                    </button>
                    {split ? <span className="block text-xs text-ink-3">split by hand</span> : null}
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
                  <Td align="right" className="max-lg:hidden print:table-cell!">
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
                {one.property.id === chosen ? (
                  <tr>
                    <td colSpan={averaged.temperatures.length + 4} className="border-b border-rule pt-2 pb-5">
                      <p className="flex flex-wrap items-center gap-x-4 text-xs text-ink-3">
                        {split ? <span>{splitWords(split)}.</span> : null}
                        {members.length > 1 ? (
                          <span>{members.length} equivalent atoms, one signal.</span>
                        ) : null}
                        {ensemble.mayCompute && members.length > 1 ? (
                          <SplitGroup key={members.join()} atoms={members} name={name} />
                        ) : null}
                        {ensemble.mayCompute && split ? (
                          <JoinGroup atom={members[0] ?? 0} name={name} />
                        ) : null}
                      </p>
                      <p className="figures mt-1 text-ink-2 sm:hidden">
                        {averaged.temperatures
                          .map(
                            (kelvin, k) =>
                              `${formatTemperature(kelvin)} K ${fixed(one.averages[k]?.value ?? null, digits)}`,
                          )
                          .join(", ")}
                        {unit ? ` ${unit}` : ""}; spread of the shapes {fixed(one.average.spread, digits)}
                        {mover === null
                          ? ""
                          : `; most moved by ${mover.name}, ${signed(mover.change, digits)} without it`}
                        .
                      </p>
                      <PropertyFigures
                        one={{ ...one, property: { ...one.property, name: `${quantity} of ${name}` } }}
                        averaged={averaged}
                        weighed={weighed}
                        list={contributions}
                        className="mt-3"
                      />
                    </td>
                  </tr>
                ) : null}
              </Fragment>
            ))}
          </tbody>
        </Table>
      </div>
      <MeasuredBlock
        {...{ quantity, list, view }}
        facts={averageFacts(averaged, weighed, { temperatureK, sigma })}
      />
    </section>
  );
}

/** The last split by hand that made this group what it is. */
function splitOf(said: SaidView, members: readonly number[]) {
  return (
    said.splits.findLast(({ parts }) => parts.some((part) => part.includes((members[0] ?? -1) + 1))) ?? null
  );
}

const splitWords = ({ by, at }: SaidView["splits"][number]) =>
  `split by hand${by === null ? "" : ` by ${by}`}, ${formatDate(at)}`;
