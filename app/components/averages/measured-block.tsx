import { Download } from "lucide-react";
import { type FormEvent, useId, useState } from "react";
import { saveText } from "~/components/charts/export-figure";
import { Button, SubmitButton } from "~/components/ui/button";
import { Field, frameClass } from "~/components/ui/field";
import { NumberField } from "~/components/ui/number-field";
import { Segments } from "~/components/ui/segments";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { type MeasuredState, type Nucleus, readPasted, setBeside } from "~/lib/averages/measured";
import { FEWEST_FOR_SCALING } from "~/lib/averages/shielding-fit";
import { atomName, symbolOf } from "~/lib/chem/elements";
import { ABSENT, fixed, formatTemperature, MINUS, plural, signed, withUnit } from "~/lib/format";
import { toCsv } from "~/lib/workbench/tsv";
import type { AveragedProperty } from "./use-averages";
import { useMeasured } from "./use-measured";

const WRONG = "A number such as 77.30.";

/** Whether the name of a quantity speaks of shieldings. */
const saysShielding = (quantity: string) => /shield|sigma|σ/i.test(quantity);

/** A per-atom quantity beside what was measured; shieldings are scaled to shifts first, nucleus by nucleus. */
export function MeasuredBlock({ quantity, list }: { quantity: string; list: readonly AveragedProperty[] }) {
  const { ensemble, temperatureK } = useWorkbench();
  const [state, change] = useMeasured(quantity);
  const unit = list[0]?.property.unit ?? null;
  const shieldings =
    unit === "ppm" && (state.are ?? (saysShielding(quantity) ? "shieldings" : "shifts")) === "shieldings";
  const nuclei = setBeside(
    list.map(({ property, average, error }) => {
      const first = property.atoms?.[0] ?? 0;
      return {
        atom: first + 1,
        z: ensemble.elements[first] ?? 0,
        average: average.value,
        error: error?.sd ?? null,
        measured: state.values.get(first + 1) ?? null,
      };
    }),
    { shieldings, scaling: state.scaling },
  );
  const names = new Map(
    list.map(({ property }) => [
      (property.atoms?.[0] ?? 0) + 1,
      (property.atoms ?? []).map((atom) => atomName(ensemble.elements, atom)).join(", "),
    ]),
  );
  const groupOf = new Map(
    list.flatMap(({ property }) =>
      (property.atoms ?? []).map((atom) => [atom + 1, (property.atoms?.[0] ?? 0) + 1] as const),
    ),
  );
  const nameOf = (atom: number | null) => (atom === null ? "" : (names.get(atom) ?? ""));
  const set = (atom: number, value: number | null) => {
    const values = new Map(state.values);
    if (value === null) values.delete(atom);
    else values.set(atom, value);
    change({ values });
  };
  const kind = shieldings ? "shift" : quantity;
  return (
    <details className="mt-4 print:hidden" open={state.values.size > 0 || state.scaling.size > 0}>
      <summary className="cursor-pointer text-link">Set beside measured values</summary>
      <div className="mt-3 grid gap-5">
        <p className="max-w-read text-ink-2">
          Measured values stand in the address of this page and in nothing else: whoever gets the address sees
          the same comparison.
        </p>
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
        <PasteList
          groupOf={groupOf}
          onRead={(values) => change({ values: new Map([...state.values, ...values]) })}
        />
        <NucleusTable {...{ nuclei, shieldings, unit, nameOf, state, change }} />
        <BesideTable {...{ nuclei, shieldings, unit, kind, nameOf, set, temperatureK }} />
        <div className="flex flex-wrap gap-3">
          <Button
            size="sm"
            icon={<Download aria-hidden="true" />}
            onClick={() => saveText("measured.csv", "text/csv", besideCsv(nuclei, unit, nameOf))}
          >
            CSV
          </Button>
          {state.values.size > 0 ? (
            <Button size="sm" onClick={() => change({ values: new Map() })}>
              Clear the measured values
            </Button>
          ) : null}
        </div>
      </div>
    </details>
  );
}

function besideCsv(
  nuclei: readonly Nucleus[],
  unit: string | null,
  nameOf: (atom: number) => string,
): string {
  const of = (name: string) => (unit ? `${name} [${unit}]` : name);
  return toCsv(
    [
      "atoms",
      of("average"),
      of("computed"),
      of("uncertainty"),
      of("measured"),
      of("difference"),
      "slope",
      of("intercept"),
    ],
    nuclei.flatMap(({ groups, line }) =>
      groups.map((group) => [
        nameOf(group.atom),
        group.average,
        group.computed,
        group.computedError,
        group.measured,
        group.difference,
        line?.slope ?? null,
        line?.intercept ?? null,
      ]),
    ),
  );
}

function PasteList({
  groupOf,
  onRead,
}: {
  groupOf: ReadonlyMap<number, number>;
  onRead: (values: ReadonlyMap<number, number>) => void;
}) {
  const id = useId();
  const [text, setText] = useState("");
  const [said, setSaid] = useState<string | null>(null);
  const take = (event: FormEvent) => {
    event.preventDefault();
    const { values, unread } = readPasted(text, groupOf);
    if (values.size > 0) onRead(values);
    setSaid(
      unread.length > 0
        ? `Not read: ${unread.slice(0, 3).join("; ")}${unread.length > 3 ? ` and ${unread.length - 3} more` : ""}. A line is an atom of the table and a number with a decimal point: C4 77.3.`
        : null,
    );
    if (unread.length === 0) setText("");
  };
  return (
    <form onSubmit={take} className="grid max-w-read gap-3">
      <Field id={id} label="A list to take in, an atom and a value a line" error={said ?? undefined}>
        <textarea
          id={id}
          rows={3}
          value={text}
          placeholder={"C1 77.30\nH4 1.21"}
          spellCheck={false}
          aria-invalid={said ? true : undefined}
          aria-describedby={said ? `${id}-error` : undefined}
          className={`figures ${frameClass(said !== null)} h-auto! w-full py-2`}
          onChange={(event) => setText(event.currentTarget.value)}
        />
      </Field>
      <div>
        <SubmitButton kind="plain" disabled={text.trim() === ""}>
          Take the values
        </SubmitButton>
      </div>
    </form>
  );
}

/** A nucleus a row: the line of its shieldings, and how well it meets the measured values. */
function NucleusTable({
  nuclei,
  shieldings,
  unit,
  nameOf,
  state,
  change,
}: {
  nuclei: readonly Nucleus[];
  shieldings: boolean;
  unit: string | null;
  nameOf: (atom: number | null) => string;
  state: MeasuredState;
  change: (part: Partial<MeasuredState>) => void;
}) {
  const type = (z: number, line: { slope: number; intercept: number } | null) => {
    const scaling = new Map(state.scaling);
    if (line === null) scaling.delete(z);
    else scaling.set(z, line);
    change({ scaling });
  };
  return (
    <div className="grid gap-5">
      {nuclei.map(({ z, line, agreement, farthest }) => (
        <section key={z} aria-label={`Nucleus ${symbolOf(z)}`} className="border-t border-rule pt-3">
          <p className="figures max-w-read">
            <b>{symbolOf(z)}</b> {agreementWords(agreement, unit, nameOf(farthest), line?.from === "fitted")}
          </p>
          {shieldings ? (
            <>
              <p className="figures mt-1 max-w-read text-ink-2">{lineWords(line)}</p>
              <div className="mt-3 flex flex-wrap items-end gap-3">
                <NumberField
                  label="Slope"
                  className="w-32"
                  value={line?.slope ?? null}
                  optional
                  placeholder="−1.05"
                  write={(value) => fixed(value, 4)}
                  wrong="A slope near −1, not 0."
                  onCommit={(slope) =>
                    slope === null || slope === 0
                      ? type(z, null)
                      : type(z, { slope, intercept: line?.intercept ?? 0 })
                  }
                />
                <NumberField
                  label="Intercept"
                  className="w-40"
                  unit="ppm"
                  value={line?.intercept ?? null}
                  optional
                  placeholder="186.20"
                  write={(value) => fixed(value, 2)}
                  wrong={WRONG}
                  onCommit={(intercept) =>
                    intercept === null ? type(z, null) : type(z, { slope: line?.slope ?? -1, intercept })
                  }
                />
                {line?.from === "typed" ? (
                  <TextButton className="mb-2" onClick={() => type(z, null)}>
                    Fit to the measured values
                  </TextButton>
                ) : null}
              </div>
            </>
          ) : null}
        </section>
      ))}
      {shieldings ? (
        <p className="max-w-read text-xs text-ink-3">
          Shift = (intercept {MINUS} shielding)/({MINUS}slope). Slope and intercept belong to one level,
          solvent and nucleus; with slope {MINUS}1 the intercept is the shielding of the reference compound. A
          line fitted to the values that it is then compared with makes deviations look smaller than they are.
        </p>
      ) : null}
    </div>
  );
}

function lineWords(line: Nucleus["line"]): string {
  if (line === null) {
    return `No line yet: measure ${FEWEST_FOR_SCALING} shifts of this nucleus, or type in slope and intercept.`;
  }
  if (line.from === "typed") return "Slope and intercept as typed in.";
  return `Fitted to ${plural(line.n, "measured shift")}.`;
}

/** A line that was fitted to these very values has slope 1 against them: there is nothing to take out. */
function agreementWords(
  agreement: Nucleus["agreement"],
  unit: string | null,
  farthest: string,
  fitted: boolean,
): string {
  if (agreement === null) return "Nothing measured yet.";
  const of = (value: number) => withUnit(fixed(value, 2), unit ?? "");
  const { n, mad, rmsd, max, corrected } = agreement;
  const line =
    corrected === null || fitted
      ? ""
      : ` Against the measured values it runs with slope ${fixed(corrected.line.slope, 3)} and intercept ${of(corrected.line.intercept)}; with that taken out the mean is ${of(corrected.mad)}.`;
  return `${plural(n, "value")}: mean absolute deviation ${of(mad)}, root mean square ${of(rmsd)}, largest ${of(max)} at ${farthest}.${line}`;
}

function BesideTable({
  nuclei,
  shieldings,
  unit,
  kind,
  nameOf,
  set,
  temperatureK,
}: {
  nuclei: readonly Nucleus[];
  shieldings: boolean;
  unit: string | null;
  kind: string;
  nameOf: (atom: number) => string;
  set: (atom: number, value: number | null) => void;
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
                <NumberField
                  label={`Measured, ${nameOf(group.atom)}`}
                  hideLabel
                  className="w-24"
                  value={group.measured}
                  optional
                  write={(value) => fixed(value, 2)}
                  wrong={WRONG}
                  onCommit={(value) => set(group.atom, value)}
                />
              </Td>
              <Td align="right">{group.difference === null ? ABSENT : signed(group.difference, 2)}</Td>
            </Tr>
          )),
        )}
      </tbody>
    </Table>
  );
}
