import { saveText, withFacts } from "~/components/charts/export-figure";
import { useFigureFacts } from "~/components/charts/figure-facts";
import { Provenance } from "~/components/ui/provenance";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { fixed, formatCount, formatPopulation, formatTemperature, plural } from "~/lib/format";
import type { HandCount, SearchFound } from "~/lib/trust/searches";
import { compareSearches } from "~/lib/trust/searches";
import { toCsv } from "~/lib/workbench/tsv";

type Cells = readonly (string | number | null)[];

function Block({
  title,
  fileName,
  head,
  rows,
  note,
  children,
}: {
  title: string;
  fileName: string;
  head: readonly string[];
  rows: readonly Cells[];
  note?: string;
  children: React.ReactNode;
}) {
  const facts = useFigureFacts();
  return (
    <section className="min-w-0">
      <div className="mb-2 flex items-baseline justify-between gap-3">
        <h3 className="text-sm font-semibold">{title}</h3>
        <TextButton
          className="inline-flex min-h-6 items-center text-xs no-underline! hover:underline! print:hidden pointer-coarse:min-h-11"
          onClick={() => {
            const table = withFacts(head, rows, facts());
            saveText(`${fileName}.csv`, "text/csv", toCsv(table.head, table.rows));
          }}
        >
          CSV<span className="sr-only"> of {title}</span>
        </TextButton>
      </div>
      {children}
      {note ? <p className="mt-2 text-xs text-ink-3">{note}</p> : null}
    </section>
  );
}

/** What the narrowest phones leave out; it stands in the CSV. */
const NARROW = "max-[359px]:hidden";

/** Coverage of one search; null where it found every shape once and so says nothing of itself. */
function coverageOf({ coverage }: SearchFound): number | null {
  return coverage === null || coverage.once === coverage.hits ? null : coverage.coverage;
}

/** Two searches against each other, or the two halves of a lone one. */
export function SearchTable({
  found,
  halves,
  total,
}: {
  found: readonly SearchFound[];
  halves: boolean;
  total: number;
}) {
  const pair = compareSearches(found);
  // Where every shape was found once, there is nothing to estimate from.
  const repeated = (pair?.both ?? 0) > 0 || found.some((search) => coverageOf(search) !== null);
  const compared = repeated ? pair : null;
  const title = halves ? "First half of the file against the second" : "Searches against each other";
  return (
    <Block
      title={title}
      fileName="searches"
      head={["search", "frames", "shapes", "coverage"]}
      rows={[
        ...found.map(
          (search): Cells => [search.name, search.frames, search.places.length, coverageOf(search)],
        ),
        ...(compared
          ? [
              ["in both", null, compared.both, null] as Cells,
              ["estimated to exist", null, compared.estimate, null] as Cells,
            ]
          : []),
      ]}
      note={
        halves
          ? "Two halves of one search are not two searches: this is a lower bound, and starts that bred each other make it look better than it is."
          : "Capture and recapture: a lower bound where both searches favour the same shapes. The first search against all later ones."
      }
    >
      <Table aria-label={title} className="figures">
        <thead>
          <tr>
            <Th>Search</Th>
            <Th align="right">Frames</Th>
            <Th align="right" unit={`of ${formatCount(total)}`}>
              Shapes
            </Th>
            <Th align="right" unit="%" className={NARROW}>
              Coverage
            </Th>
          </tr>
        </thead>
        <tbody>
          {found.map((search) => (
            <Tr key={search.name}>
              <Td wrap className="[overflow-wrap:anywhere]">
                {search.name}
              </Td>
              <Td align="right">{formatCount(search.frames)}</Td>
              <Td align="right">{formatCount(search.places.length)}</Td>
              <Td align="right" className={NARROW}>
                {formatPopulation(coverageOf(search))}
              </Td>
            </Tr>
          ))}
          {compared ? (
            <>
              <Tr>
                <Td>In both</Td>
                <Td />
                <Td align="right">{formatCount(compared.both)}</Td>
                <Td className={NARROW} />
              </Tr>
              <Tr>
                <Td>Estimated to exist</Td>
                <Td />
                <Td align="right">
                  <Provenance
                    name="Shapes estimated to exist"
                    value={fixed(compared.estimate, 1)}
                    formula={
                      <>
                        (n<sub>1</sub> + 1)(n<sub>2</sub> + 1)/(m + 1) − 1
                      </>
                    }
                    inputs={[
                      { label: "first", value: formatCount(compared.first) },
                      { label: "later", value: formatCount(compared.second) },
                      { label: "in both", value: formatCount(compared.both) },
                    ]}
                    raw={compared.estimate}
                  >
                    {fixed(compared.estimate, 1)}
                  </Provenance>
                </Td>
                <Td className={NARROW} />
              </Tr>
            </>
          ) : null}
        </tbody>
      </Table>
    </Block>
  );
}

const HANDS_SHOWN = 5;

/** How often each hand of a mirror pair was found, the lopsided ones first. */
export function HandTable({
  hands,
  names,
  populations,
}: {
  hands: readonly HandCount[];
  names: readonly string[];
  populations: Float64Array;
}) {
  const single = hands.filter((count) => count.own === 0 || count.other === 0);
  const shown = single.slice(0, HANDS_SHOWN);
  const times = (count: number) =>
    count === 0 ? "not found" : count === 1 ? "once" : `${formatCount(count)}×`;
  return (
    <Block
      title="Mirror partners"
      fileName="mirror-partners"
      head={["conformer", "one hand", "the other", "population [%]"]}
      rows={hands.map((count) => [
        names[count.place] ?? "",
        count.own,
        count.other,
        100 * (populations[count.place] ?? 0),
      ])}
    >
      <Table aria-label="Mirror partners" className="figures">
        <thead>
          <tr>
            <Th>Conformer</Th>
            <Th align="right">One hand</Th>
            <Th align="right">The other</Th>
            <Th align="right" unit="%">
              Population
            </Th>
          </tr>
        </thead>
        <tbody>
          {shown.map((count) => (
            <Tr key={count.place}>
              <Td className="font-semibold">{names[count.place]}</Td>
              <Td align="right">{times(count.own)}</Td>
              <Td align="right" className="text-ink-2">
                {times(count.other)}
              </Td>
              <Td align="right">{formatPopulation(populations[count.place])}</Td>
            </Tr>
          ))}
          <Tr>
            <Td colSpan={4} className="text-ink-2">
              {single.length > shown.length
                ? `${formatCount(single.length - shown.length)} more in one hand only; `
                : ""}
              {plural(hands.length - single.length, "pair")} in both
            </Td>
          </Tr>
        </tbody>
      </Table>
    </Block>
  );
}

/** Shares of the first conformers at other temperatures, and how many hold 90 %. */
export function TemperatureTable({
  names,
  temperatures,
  temperatureK,
  populationsAt,
}: {
  names: readonly string[];
  temperatures: readonly number[];
  temperatureK: number;
  populationsAt: (temperatureK: number) => Float64Array;
}) {
  const shown = names.slice(0, 4);
  const rows = temperatures.map((kelvin) => {
    const shares = populationsAt(kelvin);
    return { kelvin, shares, count: countFor(shares, 0.9) };
  });
  return (
    <Block
      title="At other temperatures"
      fileName="populations-by-temperature"
      head={["temperature [K]", ...shown.map((name) => `${name} [%]`), "conformers for 90 %"]}
      rows={rows.map(({ kelvin, shares, count }) => [
        kelvin,
        ...shown.map((_, k) => 100 * (shares[k] ?? 0)),
        count,
      ])}
    >
      <Table aria-label="Populations at other temperatures" className="figures">
        <thead>
          <tr>
            <Th unit="K">Temperature</Th>
            {shown.map((name, k) => (
              <Th key={name} align="right" unit="%" className={k === 3 ? "max-sm:hidden" : ""}>
                {name}
              </Th>
            ))}
            <Th align="right" unit="conformers">
              For 90 %
            </Th>
          </tr>
        </thead>
        <tbody>
          {rows.map(({ kelvin, shares, count }) => (
            <Tr key={kelvin} selected={kelvin === temperatureK}>
              <Td>{formatTemperature(kelvin)}</Td>
              {shown.map((name, k) => (
                <Td key={name} align="right" className={k === 3 ? "max-sm:hidden" : ""}>
                  {formatPopulation(shares[k])}
                </Td>
              ))}
              <Td align="right">{formatCount(count)}</Td>
            </Tr>
          ))}
        </tbody>
      </Table>
    </Block>
  );
}

function countFor(shares: Float64Array, share: number): number {
  let held = 0;
  let count = 0;
  for (const value of [...shares].sort((a, b) => b - a)) {
    if (held >= share - 1e-12) break;
    held += value;
    count += 1;
  }
  return count;
}
