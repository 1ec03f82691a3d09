import { Download } from "lucide-react";
import { useMemo } from "react";
import { saveText } from "~/components/charts/export-figure";
import { Button } from "~/components/ui/button";
import { Note } from "~/components/ui/note";
import { Segments } from "~/components/ui/segments";
import { TextButton } from "~/components/ui/text-link";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { assignmentPairs, compareMeasured } from "~/lib/averages/assignment";
import type { AveragesView } from "~/lib/averages/averages-view";
import {
  areShieldings,
  asideWords,
  measuredRecord,
  readPasted,
  saysNothing,
  shieldingLike,
} from "~/lib/averages/measured";
import { type AverageFacts, agreementCsv, besideCsv } from "~/lib/averages/measured-csv";
import { atomName, symbolOf } from "~/lib/chem/elements";
import { fixed, formatDateTime, plural } from "~/lib/format";
import { makeGraph } from "~/lib/structure";
import { AssignmentTable } from "./assignment-table";
import { KeepMeasured } from "./keep-measured";
import { MeasuredNuclei } from "./measured-nuclei";
import { MeasuredPaste } from "./measured-paste";
import { MeasuredTable } from "./measured-table";
import type { AveragedProperty } from "./use-averages";
import { useMeasured } from "./use-measured";

/** A per-atom quantity beside what was measured; shieldings are scaled to shifts first, nucleus by nucleus. */
export function MeasuredBlock({
  quantity,
  list,
  view,
  facts,
}: {
  quantity: string;
  list: readonly AveragedProperty[];
  view: AveragesView;
  /** What the averages belong to; it goes into the files. */
  facts: AverageFacts;
}) {
  const { ensemble, temperatureK } = useWorkbench();
  const { elements, bonds } = ensemble;
  // The list is made anew with every temperature, its groups are not: what follows from them stays as it is.
  const key = JSON.stringify(list.map(({ property }) => property.atoms ?? []));
  const groups = useMemo((): number[][] => JSON.parse(key), [key]);
  const fromOne = useMemo(() => groups.map((atoms) => atoms.map((atom) => atom + 1)), [groups]);
  const measured = useMeasured(quantity, view.said, fromOne);
  const { state, change } = measured;
  const record = measuredRecord(state);
  const unit = list[0]?.property.unit ?? null;
  const shieldings = areShieldings(state, unit);
  const pairs = useMemo(() => {
    const isotopes = view.isotopes === null ? undefined : Uint16Array.from(view.isotopes);
    const graph = makeGraph(Uint8Array.from(elements), Int32Array.from(bonds), isotopes);
    const first = (place: number) => (groups[place]?.[0] ?? 0) + 1;
    return assignmentPairs(graph, groups).map(([a, b]): [number, number] => [first(a), first(b)]);
  }, [elements, bonds, view.isotopes, groups]);
  const { nuclei, pairs: assignments } = compareMeasured(
    list.map(({ property, average, error }) => {
      const first = property.atoms?.[0] ?? 0;
      return {
        atom: first + 1,
        z: elements[first] ?? 0,
        average: average.value,
        error: error?.sd ?? null,
        measured: state.values.get(first + 1) ?? null,
      };
    }),
    { shieldings, scaling: state.scaling, pairs, swapped: state.swapped },
  );
  const like = unit === "ppm" && !shieldings ? shieldingLike(nuclei) : [];
  const names = new Map(
    groups.map((atoms) => [(atoms[0] ?? 0) + 1, atoms.map((atom) => atomName(elements, atom)).join(", ")]),
  );
  const groupOf = new Map(
    groups.flatMap((atoms) => atoms.map((atom) => [atom + 1, (atoms[0] ?? 0) + 1] as const)),
  );
  const nameOf = (atom: number | null) =>
    atom === null ? "" : (names.get(atom) ?? atomName(elements, atom - 1));
  const set = (atom: number, value: number | null) => {
    const values = new Map(state.values);
    if (value === null) values.delete(atom);
    else values.set(atom, value);
    change({ values });
  };
  const said = view.said.measured.find((one) => one.quantity === quantity);
  const homeless = [...state.values.keys()].filter((atom) => !names.has(atom));
  const aside = state.aside ?? [];
  const anything = state.values.size > 0 || aside.length > 0 || state.scaling.size > 0;
  const save = (name: string, text: string) => saveText(name, "text/csv", text);
  const shown = { quantity, unit, nuclei, pairs: assignments, nameOf };
  return (
    <details className={`mt-4 ${anything ? "" : "print:hidden"}`} open={anything || measured.draft}>
      <summary className="cursor-pointer text-link print:font-semibold print:text-ink">
        {anything ? `${quantity} beside measured values` : "Set beside measured values"}
      </summary>
      {/* On paper a block: a grid that runs over pages lets what follows lie over its last rows. */}
      <div className="mt-3 grid gap-5 print:block print:*:mt-4">
        {said && !measured.draft ? (
          <p className="figures max-w-read text-ink-2">
            {plural(said.values.length, "measured value")} kept with the ensemble
            {said.by === null ? "" : ` by ${said.by}`}, {formatDateTime(said.at)}.
          </p>
        ) : null}
        {measured.draft ? (
          <KeepMeasured
            intent="measured"
            record={record}
            emptied={saysNothing(record)}
            anyKept={!saysNothing(measuredRecord(measured.kept))}
            version={view.said.version}
            drop={measured.drop}
          />
        ) : null}
        {unit === "ppm" ? (
          <Segments
            label="The numbers of the table are"
            value={shieldings ? "shieldings" : "shifts"}
            options={[
              { value: "shieldings", label: "Shieldings" },
              { value: "shifts", label: "Shifts" },
            ]}
            onChange={(are) => change({ are })}
          />
        ) : null}
        {like.length > 0 ? (
          <Note tone="mark">
            <p>
              These look like shieldings: against the measured shifts they run with slope{" "}
              {like.map(({ z, slope }) => `${fixed(slope, 3)} (${symbolOf(z)})`).join(", ")}, and shifts would
              run with a slope near 1.{" "}
              <TextButton className="print:hidden" onClick={() => change({ are: "shieldings" })}>
                Take them as shieldings and scale them
              </TextButton>
            </p>
          </Note>
        ) : null}
        <MeasuredPaste
          what="atom"
          placeholder={"C1 77.30\nH4 1.21"}
          onTake={(text, commas) => {
            const { values, unread } = readPasted(text, groupOf, commas);
            if (values.size > 0) change({ values: new Map([...state.values, ...values]) });
            return unread;
          }}
        />
        <MeasuredNuclei {...{ nuclei, shieldings, unit, nameOf, state, change }} />
        <AssignmentTable
          pairs={assignments}
          {...{ unit, nameOf }}
          onChoose={(atom, swap) => {
            const swapped = new Set(state.swapped);
            if (swap) swapped.add(atom);
            else swapped.delete(atom);
            change({ swapped });
          }}
        />
        <MeasuredTable
          {...{ nuclei, shieldings, unit, nameOf, set, temperatureK }}
          swapped={new Set(assignments.flatMap(({ atoms, swapped }) => (swapped ? atoms : [])))}
          entered={state.values}
          kind={shieldings ? "shift" : quantity}
        />
        {aside.length > 0 ? (
          <p className="max-w-read text-ink-2">
            {asideWords(aside, (atom) => atomName(elements, atom - 1), shieldings ? "ppm" : unit)} Such a
            value comes back when its atoms are one signal again.
          </p>
        ) : null}
        {homeless.length > 0 ? (
          <p className="max-w-read text-ink-2">
            Kept, but no row of its own now: the measured {homeless.length === 1 ? "value" : "values"} of{" "}
            {homeless.map(nameOf).join(", ")}. It takes no part until its group is taken apart again.
          </p>
        ) : null}
        <div className="flex flex-wrap gap-3 print:hidden">
          <Button
            size="sm"
            icon={<Download aria-hidden="true" />}
            onClick={() => save("measured.csv", besideCsv([shown], facts))}
          >
            CSV of the values
          </Button>
          <Button
            size="sm"
            icon={<Download aria-hidden="true" />}
            disabled={state.values.size === 0}
            onClick={() => save("agreement.csv", agreementCsv([shown], facts))}
          >
            CSV of the errors
          </Button>
          {state.values.size > 0 || aside.length > 0 ? (
            <Button size="sm" onClick={() => change({ values: new Map(), swapped: new Set(), aside: [] })}>
              Clear the measured values
            </Button>
          ) : null}
        </div>
      </div>
    </details>
  );
}
