import { Download } from "lucide-react";
import { useMemo } from "react";
import { href } from "react-router";
import { saveText } from "~/components/charts/export-figure";
import { Badge } from "~/components/ui/badge";
import { Button, ButtonLink } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { BreakableName } from "~/components/ui/level-marker";
import { Provenance } from "~/components/ui/provenance";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { Average } from "~/lib/averages/average";
import { fromDefinition } from "~/lib/averages/observable";
import { couplingWords, observableWords } from "~/lib/averages/observable-words";
import type { PropertyValues } from "~/lib/averages/property-set";
import { type AverageRule, possibleRules } from "~/lib/averages/rule";
import { shownAveragesCsv } from "~/lib/averages/shown-csv";
import { coveredShare, digitsFor } from "~/lib/averages/words";
import { ABSENT, fixed, formatCount, formatEnergy, formatTemperature, plural, withUnit } from "~/lib/format";
import { makeGraph } from "~/lib/structure";
import { RuleName } from "./rule-name";
import type { Averaged, AveragedProperty } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

/** Every property by its own rule: one column a temperature, spread of the shapes, uncertainty of the level. */
export function PropertyTable({
  averaged,
  counters,
  groups,
  weighed,
  sigma,
  chosen,
  onChoose,
  csv,
}: {
  averaged: Averaged;
  /** Columns that only count frames up, by name. */
  counters: readonly string[];
  /** Per-atom quantities, one row each; their atoms stand in a table of their own. */
  groups: readonly { quantity: string; unit: string | null; groups: number; covered: number }[];
  weighed: WeighedConformers;
  sigma: number | null;
  chosen: string | null;
  onChoose: (id: string) => void;
  csv: string;
}) {
  const { ensemble } = useWorkbench();
  const scalars = averaged.properties.filter(({ property }) => property.quantity === null);
  return (
    // On paper the table stays in one piece where a page can hold it.
    <section className="mt-9 print:break-inside-avoid">
      <BlockHead title="Properties of the ensemble">
        {ensemble.mayCompute ? (
          <ButtonLink size="sm" to={`/ensembles/${ensemble.id}/columns`}>
            Add a property table
          </ButtonLink>
        ) : null}
        <Button size="sm" onClick={() => saveShown(averaged, weighed, sigma, ensemble.name)}>
          <Download aria-hidden="true" />
          CSV
        </Button>
      </BlockHead>
      <Table aria-label="Averages of the properties" className="figures">
        <thead>
          <tr>
            <Th>Property</Th>
            <Th className="max-xl:hidden">Rule</Th>
            {averaged.temperatures.map((kelvin, k) => (
              <Th key={kelvin} align="right" className={k === averaged.here ? "text-ink!" : "max-sm:hidden"}>
                {formatTemperature(kelvin)} K
              </Th>
            ))}
            <Th align="right" unit="of the shapes" className="max-xl:hidden print:table-cell!">
              Spread
            </Th>
            <Th align="right" unit="of the level">
              Uncertainty
            </Th>
            <Th align="right" unit="%" className="max-sm:hidden">
              Covered
            </Th>
            <Th className="max-sm:hidden">Unit</Th>
          </tr>
        </thead>
        <tbody>
          {scalars.map((one) => (
            <PropertyRow
              key={one.property.id}
              one={one}
              averaged={averaged}
              weighed={weighed}
              sigma={sigma}
              selected={one.property.id === chosen}
              onChoose={onChoose}
            />
          ))}
          {groups.map((group) => (
            <Tr key={group.quantity}>
              <Td wrap>
                <span className="font-medium">{group.quantity}</span>
                <span className="block text-xs text-ink-3">per atom, equal ones merged</span>
              </Td>
              <Td className="text-ink-2 max-xl:hidden">per atom, equal ones merged</Td>
              <Td align="right" colSpan={1}>
                <a className="text-link underline underline-offset-3" href={`#${anchorOf(group.quantity)}`}>
                  {plural(group.groups, "group")}
                </a>
              </Td>
              {averaged.temperatures.slice(1).map((kelvin) => (
                <Td key={kelvin} className="max-sm:hidden" />
              ))}
              <Td className="max-xl:hidden print:table-cell!" />
              <Td />
              <Td align="right" className="max-sm:hidden">
                <Covered covered={group.covered} refused={group.covered < 0.9} />
              </Td>
              <Td className="text-ink-2 max-sm:hidden">{group.unit ?? ""}</Td>
            </Tr>
          ))}
          {counters.map((name) => (
            <Tr key={name} className="text-ink-3">
              <Td wrap colSpan={averaged.temperatures.length + 5}>
                <span className="[overflow-wrap:anywhere]">{name}</span>
                <span className="block text-xs">
                  counts the frames up: averaged in the files and in editions, not here
                </span>
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      <p className="mt-2 max-w-[52rem] text-xs text-ink-3">
        Spread belongs to the molecule, uncertainty to the energies
        {averaged.draws === null || sigma === null
          ? "."
          : ` (${formatCount(averaged.draws)} draws of ± ${formatEnergy(sigma)} kcal/mol on each energy, seed ${averaged.seed}).`}{" "}
        Below 90 % covered nothing is averaged; the file leaves those cells empty. The CSV is this table with
        every temperature; one row a column at {formatTemperature(averaged.temperatures[averaged.here])} K is
        in{" "}
        <a className="text-link underline underline-offset-3" href={csv} download>
          averages.csv
        </a>
        .{" "}
        {scalars.some(({ moments }) => moments.mirrored.some((flag) => flag === 1))
          ? "A shape that stands for a mirror pair enters an angle half at t and half at −t, one that is its own mirror image as its frame is numbered. Where every shape stands for a pair, the mean lies at 0° or 180° whatever the energies."
          : null}
      </p>
    </section>
  );
}

function saveShown(
  averaged: Averaged,
  weighed: WeighedConformers,
  sigma: number | null,
  ensemble: string,
): void {
  const text = shownAveragesCsv({
    temperatures: averaged.temperatures,
    here: averaged.here,
    level: weighed.level.name,
    weights: weighed.weights.kind,
    sigma,
    draws: averaged.draws,
    seed: averaged.seed,
    rows: averaged.properties.map((one) => ({ ...one, rule: one.property.rule })),
  });
  const kelvin = averaged.temperatures.map((one) => formatTemperature(one)).join(", ");
  saveText(`${ensemble} averages at ${kelvin} K.csv`, "text/csv", text);
}

/** Name of the place where the atoms of a quantity stand. */
export function anchorOf(quantity: string): string {
  return `atoms-${quantity.toLowerCase().replace(/[^a-z0-9]+/g, "-")}`;
}

function PropertyRow({
  one,
  averaged,
  weighed,
  sigma,
  selected,
  onChoose,
}: {
  one: AveragedProperty;
  averaged: Averaged;
  weighed: WeighedConformers;
  sigma: number | null;
  selected: boolean;
  onChoose: (id: string) => void;
}) {
  const { property, average, moments } = one;
  const coupling = useCoupling(property);
  const digits = digitsFor(property.unit, average.value);
  const origin = originWords(property);
  const proposed = proposedRule(property, moments.rule);
  const bothHands = moments.mirrored.some((flag) => flag === 1);
  const rule = (
    <>
      <RuleName rule={moments.rule} />
      {moments.rule === "circular" && bothHands ? ", both hands" : ""}
    </>
  );
  return (
    <Tr selected={selected}>
      <Td wrap>
        <button
          type="button"
          aria-pressed={selected}
          className="rounded-sm text-left font-medium [overflow-wrap:anywhere] hover:underline pointer-coarse:min-h-11"
          onClick={() => onChoose(property.id)}
        >
          <BreakableName name={property.name} />
        </button>
        <span className="block text-xs text-ink-3">
          <span className="xl:hidden">
            {rule}
            {origin === "" ? "" : "; "}
          </span>
          <span className="[overflow-wrap:anywhere]">{origin}</span>
          {proposed === null ? null : (
            <>
              {origin === "" ? "" : "; "}proposed: <RuleName rule={proposed} />
            </>
          )}
          {property.unit ? <span className="sm:hidden">, in {property.unit}</span> : null}
        </span>
      </Td>
      <Td wrap className="text-ink-2 max-xl:hidden">
        {rule}
      </Td>
      {one.averages.map((at, k) => (
        <Td
          key={averaged.temperatures[k]}
          align="right"
          className={k === averaged.here ? "" : "text-ink-2 max-sm:hidden"}
        >
          {k === averaged.here && at.value !== null ? (
            <Provenance
              name={property.name}
              value={fixed(at.value, digits)}
              unit={property.unit ?? undefined}
              formula={
                coupling === null ? (
                  <Formula rule={moments.rule} />
                ) : (
                  <>
                    <Formula rule={moments.rule} />, {coupling.formula}
                  </>
                )
              }
              inputs={[
                ...(coupling === null
                  ? []
                  : [
                      { label: "angle", value: coupling.angle },
                      { label: "source", value: coupling.source },
                    ]),
                { label: "conformers", value: formatCount(weighed.kept.length) },
                { label: "weighed by", value: `${weighed.level.name}, ${weighed.weights.kind}` },
                { label: "temperature", value: withUnit(formatTemperature(averaged.temperatures[k]), "K") },
                { label: "covered", value: withUnit(coveredShare(at.covered), "%") },
                ...(at.resultant === null ? [] : [{ label: "R", value: fixed(at.resultant, 3) }]),
                ...(one.error?.low != null && one.error.high !== null
                  ? [
                      {
                        label: "95 % of the draws",
                        value: `${fixed(one.error.low, digits)} to ${fixed(one.error.high, digits)}`,
                      },
                    ]
                  : []),
              ]}
              raw={at.value}
              method={{ to: `${href("/methods")}#averages`, label: "How this is computed" }}
            >
              {fixed(at.value, digits)}
            </Provenance>
          ) : (
            <span className={at.value === null ? "text-ink-3" : ""}>{fixed(at.value, digits)}</span>
          )}
        </Td>
      ))}
      <Td align="right" className="max-xl:hidden print:table-cell!">
        {fixed(average.spread, digits)}
      </Td>
      <Td align="right">
        <Uncertainty one={one} sigma={sigma} digits={digits} />
      </Td>
      <Td align="right" className="max-sm:hidden">
        <Covered covered={average.covered} refused={average.state === "not-covered"} />
      </Td>
      <Td className="text-ink-2 max-sm:hidden">{property.unit ?? ""}</Td>
    </Tr>
  );
}

/** The rule that name and unit speak for, where it is another than the one in force; what was picked leaves no doubt. */
function proposedRule(property: PropertyValues, now: AverageRule): AverageRule | null {
  const [first] = possibleRules(property);
  return property.definition !== null || first === undefined || first === now ? null : first;
}

function Uncertainty({
  one,
  sigma,
  digits,
}: {
  one: AveragedProperty;
  sigma: number | null;
  digits: number;
}) {
  const { average, error, moments } = one;
  if (average.fixed) return <span className="text-ink-2">fixed</span>;
  if (sigma === null || error === null || average.value === null) return <>{ABSENT}</>;
  // Both hands of every shape: the direction cannot move, only its resultant can.
  const held = moments.rule === "circular" && moments.mirrored.some((flag) => flag === 1) && error.sd < 1e-9;
  if (held) return <span className="text-ink-2">fixed</span>;
  return <>± {fixed(error.sd, digits)}</>;
}

/** Share of the population with a value; a badge where some is missing. */
export function Covered({ covered, refused }: { covered: Average["covered"]; refused: boolean }) {
  const figure = coveredShare(covered);
  if (refused) return <Badge>{figure}, not averaged</Badge>;
  return covered < 1 ? <Badge>{figure}</Badge> : figure;
}

/** Of a coupling: formula, source and what its angle is. */
function useCoupling(property: PropertyValues) {
  const { elements, bonds } = useWorkbench().ensemble;
  return useMemo(() => {
    const path = property.definition?.atoms[0];
    if (property.definition?.observable !== "coupling" || path === undefined) return null;
    return couplingWords(
      makeGraph(Uint8Array.from(elements), Int32Array.from(bonds)),
      path.map((atom) => atom - 1),
      fromDefinition(property.definition, property.rule),
    );
  }, [property.definition, property.rule, elements, bonds]);
}

function originWords(property: PropertyValues): string {
  if (property.definition) return observableWords(fromDefinition(property.definition, property.rule));
  const origin = property.origin ?? "";
  const name = /^(table|structures|key|field):(.*)$/.exec(origin);
  // A column that is called as in its file needs no second name.
  if (name) return name[2] === property.name ? "" : (name[2] ?? "");
  return origin === "expression" ? "computed from columns" : origin;
}

function Formula({ rule }: { rule: AveragedProperty["moments"]["rule"] }) {
  const sum = (what: React.ReactNode) => (
    <>
      Σ p<sub>i</sub> {what} / Σ p<sub>i</sub>
    </>
  );
  if (rule === "r-6" || rule === "r-3") {
    const power = rule.slice(2);
    return (
      <>
        r = [
        {sum(
          <>
            r<sub>i</sub>
            <sup>−{power}</sup>
          </>,
        )}
        ]<sup>−1/{power}</sup>
      </>
    );
  }
  if (rule === "circular") {
    return (
      <>
        z ={" "}
        {sum(
          <>
            exp(i t<sub>i</sub>)
          </>,
        )}
        , mean = arg z, R = |z|
      </>
    );
  }
  if (rule === "rms") {
    return (
      <>
        [
        {sum(
          <>
            A<sub>i</sub>
            <sup>2</sup>
          </>,
        )}
        ]<sup>1/2</sup>
      </>
    );
  }
  return (
    <>
      {sum(
        <>
          A<sub>i</sub>
        </>,
      )}
    </>
  );
}
