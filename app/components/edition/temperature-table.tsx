import { Note } from "~/components/ui/note";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { EditionView } from "~/lib/edition/views";
import { fixed, formatEnergy, formatPopulation, formatTemperature, trimmed } from "~/lib/format";
import { byPopulation } from "~/lib/workbench/conformers";
import { digitsFor } from "./averages-table";
import { EditionHead } from "./edition-head";

/** Conformers in the table; the file has all. */
const FIRST = 6;

interface Line {
  key: string;
  name: string;
  unit: string;
  values: string[];
}

/** Populations, ensemble figures and averages side by side at every temperature of the edition. */
export function TemperatureTable({ edition }: { edition: EditionView }) {
  const { temperatures, temperature } = edition;
  if (temperatures === null || temperatures.kelvin.length < 2) return null;
  const groups = [
    { title: "Populations, %", lines: populationLines(edition, temperatures) },
    { title: "Ensemble", lines: ensembleLines(temperatures) },
    { title: "Averages", lines: averageLines(edition, temperatures) },
  ].filter(({ lines }) => lines.length > 0);
  const width = temperatures.kelvin.length + 2;
  return (
    <section className="mt-10" aria-labelledby="edition-temperatures">
      <EditionHead id="edition-temperatures">At several temperatures</EditionHead>
      {temperatures.warning === null ? (
        <p className="mt-1 text-ink-2">The same energies at each; vibrations are not redone.</p>
      ) : (
        <Note tone="held" className="figures mt-2">
          {temperatures.warning}
        </Note>
      )}
      <div className="mt-3 overflow-x-auto print:overflow-visible">
        <Table aria-labelledby="edition-temperatures">
          <thead>
            <tr>
              <Th>Quantity</Th>
              <Th className="max-sm:hidden">Unit</Th>
              {temperatures.kelvin.map((kelvin) => (
                <Th key={kelvin} align="right" unit="K">
                  <span className={kelvin === temperature ? "font-semibold text-ink" : ""}>
                    {formatTemperature(kelvin)}
                  </span>
                </Th>
              ))}
            </tr>
          </thead>
          {groups.map(({ title, lines }) => (
            <tbody key={title} className="keep">
              <tr>
                <th
                  colSpan={width}
                  scope="rowgroup"
                  className="px-3 pt-3 pb-1 text-left text-xs font-semibold text-ink-3 max-sm:px-2"
                >
                  {title}
                </th>
              </tr>
              {lines.map(({ key, name, unit, values }) => (
                <Tr key={key} className="figures">
                  <Td wrap className="hyphens-auto [overflow-wrap:anywhere]">
                    {name}
                    {unit === "" ? null : <span className="block text-xs text-ink-3 sm:hidden">{unit}</span>}
                  </Td>
                  <Td className="text-ink-2 max-sm:hidden">{unit}</Td>
                  {values.map((value, k) => (
                    <Td
                      key={temperatures.kelvin[k]}
                      align="right"
                      className={temperatures.kelvin[k] === temperature ? "font-medium" : "text-ink-2"}
                    >
                      {value}
                    </Td>
                  ))}
                </Tr>
              ))}
            </tbody>
          ))}
        </Table>
      </div>
      <p className="mt-2 text-xs text-ink-3">Every conformer, with every digit, in temperatures.csv.</p>
    </section>
  );
}

type Temperatures = NonNullable<EditionView["temperatures"]>;

function populationLines({ rows }: EditionView, { populations }: Temperatures): Line[] {
  return byPopulation(rows)
    .slice(0, FIRST)
    .map(({ name, index }) => ({
      key: name,
      name,
      unit: "",
      values: populations.map((shares) => formatPopulation(shares[index] ?? null)),
    }));
}

function ensembleLines({ thermo }: Temperatures): Line[] {
  return [
    {
      key: "effective",
      name: "Effective number of states",
      unit: "",
      values: thermo.map(({ effectiveCount }) => trimmed(effectiveCount, 1)),
    },
    {
      key: "free",
      name: "Conformational free energy",
      unit: "kcal/mol",
      values: thermo.map(({ freeEnergy }) => formatEnergy(freeEnergy)),
    },
  ];
}

function averageLines({ averages }: EditionView, temperatures: Temperatures): Line[] {
  return (averages ?? []).map(({ property, unit, spread, average }, k) => ({
    key: `${property} ${k}`,
    name: property,
    unit: unit ?? "",
    values: temperatures.averages.map((list) => fixed(list[k] ?? null, digitsFor(spread, average))),
  }));
}
