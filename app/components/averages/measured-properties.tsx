import { Download } from "lucide-react";
import { saveText } from "~/components/charts/export-figure";
import { Button } from "~/components/ui/button";
import { BreakableName } from "~/components/ui/level-marker";
import { NumberField } from "~/components/ui/number-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { SaidView } from "~/lib/averages/averages-view";
import { type AverageFacts, agreementCsv, besideCsv } from "~/lib/averages/measured-csv";
import {
  besideProperties,
  type FigureBeside,
  MEASURED_MOST,
  measuredPropertiesRecord,
  readPastedProperties,
} from "~/lib/averages/measured-properties";
import { unitWords } from "~/lib/averages/measured-words";
import { asTyped, digitsFor } from "~/lib/averages/words";
import { ABSENT, fixed, formatDateTime, formatTemperature, plural, signed } from "~/lib/format";
import { KeepMeasured } from "./keep-measured";
import { MeasuredPaste } from "./measured-paste";
import type { AveragedProperty } from "./use-averages";
import { useMeasuredProperties } from "./use-measured-properties";

/** Rows of a large set that are offered before a value of theirs is measured; the list takes any. */
const MOST_OFFERED = 60;

/** Couplings, distances and other properties of the whole molecule beside what was measured. */
export function MeasuredProperties({
  list,
  said,
  facts,
}: {
  /** Properties that are no quantity of single atoms. */
  list: readonly AveragedProperty[];
  said: SaidView;
  /** What the averages belong to; it goes into the files. */
  facts: AverageFacts;
}) {
  const { temperatureK } = useWorkbench();
  const { values, anyKept, draft, set, drop } = useMeasuredProperties(said);
  const names = list.map(({ property }) => property.name);
  const { rows, units } = besideProperties(
    list.map(({ property, moments, average, error }) => ({
      ...{ name: property.name, unit: property.unit, rule: moments.rule },
      ...{ average: average.value, error: average.value === null ? null : (error?.sd ?? null) },
    })),
    values,
  );
  const shown = rows.filter(({ measured }, place) => place < MOST_OFFERED || measured !== null);
  const homeless = [...values.keys()].filter((name) => !names.includes(name));
  const change = (name: string, value: number | null) => {
    const next = new Map(values);
    if (value === null) next.delete(name);
    else next.set(name, value);
    set(next);
  };
  const anything = values.size > 0;
  const beside = { rows: rows.filter(({ measured }) => measured !== null), units };
  const save = (name: string, text: string) => saveText(name, "text/csv", text);
  return (
    <details className={`mt-6 ${anything ? "" : "print:hidden"}`} open={anything || draft}>
      <summary className="cursor-pointer text-link print:font-semibold print:text-ink">
        {anything ? "Properties beside measured values" : "Set properties beside measured values"}
      </summary>
      {/* On paper a block: a grid that runs over pages lets what follows lie over its last rows. */}
      <div className="mt-3 grid gap-5 print:block print:*:mt-4">
        {said.properties && !draft ? (
          <p className="figures max-w-read text-ink-2">
            {plural(said.properties.values.length, "measured value")} kept with the ensemble
            {said.properties.by === null ? "" : ` by ${said.properties.by}`},{" "}
            {formatDateTime(said.properties.at)}.
          </p>
        ) : null}
        {draft ? (
          <KeepMeasured
            intent="measured-properties"
            record={measuredPropertiesRecord(values)}
            emptied={values.size === 0}
            {...{ anyKept, drop }}
            version={said.version}
          />
        ) : null}
        <MeasuredPaste
          what="property"
          placeholder={`${names[0] ?? "3J"} 7.20`}
          onTake={(text, commas) => {
            const { values: read, unread } = readPastedProperties(text, names, commas);
            if (read.size > 0) set(new Map([...values, ...read]));
            return unread;
          }}
        />
        {units.map(({ unit, agreement, farthest }) => (
          <p key={unit} className="figures max-w-read border-t border-rule pt-3">
            <b>{unit}</b> {unitWords(agreement, unit, farthest)}
          </p>
        ))}
        <FiguresTable rows={shown} temperatureK={temperatureK} set={change} />
        {shown.length < rows.length ? (
          <p className="max-w-read text-ink-2">
            {plural(rows.length - shown.length, "further property", "further properties")} of this large set:
            name {rows.length - shown.length === 1 ? "it" : "them"} in the list above.
          </p>
        ) : null}
        {homeless.length > 0 ? (
          <p className="max-w-read text-ink-2">
            Kept, but without a column of that name now: {homeless.join(", ")}. Such a value takes no part
            until its column is there again.
          </p>
        ) : null}
        <div className="flex flex-wrap gap-3 print:hidden">
          <Button
            size="sm"
            icon={<Download aria-hidden="true" />}
            disabled={!anything}
            onClick={() => save("measured.csv", besideCsv([], facts, beside))}
          >
            CSV of the values
          </Button>
          <Button
            size="sm"
            icon={<Download aria-hidden="true" />}
            disabled={units.length === 0}
            onClick={() => save("agreement.csv", agreementCsv([], facts, beside))}
          >
            CSV of the errors
          </Button>
          {anything ? (
            <Button size="sm" onClick={() => set(new Map())}>
              Clear the measured values
            </Button>
          ) : null}
        </div>
      </div>
    </details>
  );
}

function FiguresTable({
  rows,
  temperatureK,
  set,
}: {
  rows: readonly FigureBeside[];
  temperatureK: number;
  set: (name: string, value: number | null) => void;
}) {
  return (
    <Table aria-label="Properties beside measured values" className="figures">
      <thead>
        <tr>
          <Th>Property</Th>
          <Th align="right" unit={`${formatTemperature(temperatureK)} K`}>
            Average
          </Th>
          <Th align="right" className="max-sm:hidden">
            Uncertainty
          </Th>
          <Th>Measured</Th>
          <Th align="right">Difference</Th>
          <Th className="max-sm:hidden">Unit</Th>
        </tr>
      </thead>
      <tbody>
        {rows.map(({ name, unit, average, error, measured, difference }) => {
          const digits = digitsFor(unit, average);
          const typed = (value: number) => asTyped(value, digits);
          return (
            <Tr key={name}>
              <Td wrap className="font-semibold">
                <BreakableName name={name} />
              </Td>
              <Td align="right">{fixed(average, digits)}</Td>
              <Td align="right" className="max-sm:hidden">
                {error === null ? ABSENT : `± ${fixed(error, digits)}`}
              </Td>
              <Td className="py-1">
                <span className="hidden print:inline">{measured === null ? ABSENT : typed(measured)}</span>
                <NumberField
                  label={`Measured, ${name}`}
                  hideLabel
                  className="w-24 max-sm:w-20 print:hidden"
                  value={measured}
                  optional
                  min={-MEASURED_MOST}
                  max={MEASURED_MOST}
                  write={typed}
                  wrong="A number such as 7.20."
                  onCommit={(value) => set(name, value)}
                />
              </Td>
              <Td align="right">{difference === null ? ABSENT : signed(difference, digits)}</Td>
              <Td className="text-ink-2 max-sm:hidden">{unit ?? ""}</Td>
            </Tr>
          );
        })}
      </tbody>
    </Table>
  );
}
