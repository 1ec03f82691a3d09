import type { ReactNode } from "react";
import { href } from "react-router";
import { BlockHead } from "~/components/ui/finding";
import { Provenance, type Source } from "~/components/ui/provenance";
import { Skeleton } from "~/components/ui/skeleton";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { ABSENT, fixed, formatCount, formatTemperature, plural, withUnit } from "~/lib/format";
import { type ComparisonIntervals, FEWEST_RESAMPLED, type IntervalName } from "~/lib/levels/intervals";
import { pairDeviations, topAgreement } from "~/lib/levels/ranking";
import type { ZeroChoice } from "~/lib/url-state";
import type { Comparison } from "./use-comparison";

export const ZERO_WORDS: Record<ZeroChoice, string> = {
  "least-squares": "the mean of the matched",
  median: "the median of the matched",
  "own-minimum": "each level's own lowest",
  common: "one common conformer",
};

interface Row {
  label: ReactNode;
  name: string;
  value: number | null;
  digits: number;
  unit: string;
  formula: ReactNode;
  interval?: IntervalName;
  /** Times this for the page: per cent. */
  factor?: number;
  /** In place of the printed figure: "2 of 3". */
  text?: string;
  note?: string;
}

/** Beyond this many conformers a bootstrap would keep a phone busy for minutes. */
export const MOST_RESAMPLED = 5000;

/** Figures of agreement, of the energies or of what follows from them, with intervals; each says where it comes from. */
export function AgreementTable({
  of,
  found,
  intervals,
  resampled,
  temperatureK,
}: {
  of: "energies" | "populations";
  found: Comparison;
  intervals: ComparisonIntervals | null;
  /** False where there are too many conformers for intervals: none are coming. */
  resampled: boolean;
  temperatureK: number;
}) {
  const ofEnergies = of === "energies";
  const rows = ofEnergies ? energyRows(found) : populationRows(found);
  const { n, align } = found.comparison;
  const inputs: Source["inputs"] = [
    { label: "level a", value: found.level.name },
    { label: "reference b", value: found.reference.name },
    { label: "conformers", value: formatCount(n) },
    { label: "zero of energy", value: ZERO_WORDS[align] },
    { label: "temperature", value: withUnit(formatTemperature(temperatureK), "K") },
  ];
  return (
    <div className="min-w-0 break-inside-avoid">
      <BlockHead
        title={ofEnergies ? `Agreement, ${plural(n, "conformer")}` : "Agreement of populations and ranking"}
      />
      <Table aria-label={ofEnergies ? "Agreement of the two levels" : "Agreement of populations and ranking"}>
        <thead>
          <tr>
            <Th>Measure</Th>
            <Th align="right">Value</Th>
            <Th align="right">95 % interval</Th>
            <Th className="max-sm:hidden">Unit</Th>
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <Tr key={row.name} data-measure={row.name}>
              <Td wrap className="w-full">
                {row.label}
                {row.unit ? <span className="text-ink-3 sm:hidden">, {row.unit}</span> : null}
                {row.note ? <span className="block text-xs text-ink-3">{row.note}</span> : null}
              </Td>
              <Td align="right">
                <Figure row={row} inputs={inputs} intervals={intervals} />
              </Td>
              <Td align="right" className="text-ink-2">
                {row.interval ? <IntervalCell {...{ row, intervals, resampled, n }} /> : null}
              </Td>
              <Td className="text-ink-3 max-sm:hidden">{row.unit}</Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      {ofEnergies ? (
        <p className="mt-2 max-w-read text-xs text-ink-3">
          {intervals
            ? `Intervals: ${formatCount(intervals.resamples)} resamples of the conformers, 2.5 to 97.5 %, ${intervals.generator}, seed ${intervals.seed}; each resample finds its own zero. Conformers of one molecule are not independent: they say nothing of other molecules.`
            : n < FEWEST_RESAMPLED
              ? "No intervals below four conformers."
              : resampled
                ? "The intervals are being drawn."
                : `No intervals: they are not drawn for more than ${plural(MOST_RESAMPLED, "conformer")}, and here are ${formatCount(n)}.`}
        </p>
      ) : null}
    </div>
  );
}

function Figure({
  row,
  inputs,
  intervals,
}: {
  row: Row;
  inputs: Source["inputs"];
  intervals: ComparisonIntervals | null;
}) {
  if (row.value === null) return <span title={row.note}>{ABSENT}</span>;
  const text =
    row.text ?? (Number.isFinite(row.value) ? fixed((row.factor ?? 1) * row.value, row.digits) : "infinite");
  return (
    <Provenance
      name={row.name}
      value={text}
      unit={row.unit}
      raw={Number.isFinite(row.value) ? row.value : undefined}
      formula={row.formula}
      inputs={inputs}
      recipe={row.interval && intervals ? `seed ${intervals.seed}` : undefined}
      method={{ to: `${href("/methods")}#levels`, label: "The method" }}
    >
      {text}
    </Provenance>
  );
}

function IntervalCell({
  row,
  intervals,
  resampled,
  n,
}: {
  row: Row;
  intervals: ComparisonIntervals | null;
  resampled: boolean;
  n: number;
}) {
  if (!row.interval || n < FEWEST_RESAMPLED || row.value === null) return ABSENT;
  if (intervals === null && !resampled) return ABSENT;
  if (intervals === null) return <Skeleton className="ml-auto h-3 w-16" />;
  const interval = intervals.intervals[row.interval];
  if (interval === null) return ABSENT;
  const write = (value: number) => fixed((row.factor ?? 1) * value, row.digits);
  return `${write(interval.low)} to ${write(interval.high)}`;
}

/** A common conformer enters n with its own 0; without it the deviations of the others stand out. */
function withoutZero(c: Comparison["comparison"]): Row[] {
  if (c.align !== "common" || c.n < 2) return [];
  return [
    {
      label: "Mean absolute, without the common conformer",
      name: "Mean absolute deviation without the common conformer",
      value: (c.mad * c.n) / (c.n - 1),
      digits: 2,
      unit: "kcal/mol",
      formula: <>Σ |d| / (n − 1): the conformer at zero is left out</>,
    },
    {
      label: "Root mean square, without the common conformer",
      name: "Root mean square deviation without the common conformer",
      value: c.rmsd * Math.sqrt(c.n / (c.n - 1)),
      digits: 2,
      unit: "kcal/mol",
      formula: (
        <>
          √(Σ d<sup>2</sup> / (n − 1)): the conformer at zero is left out
        </>
      ),
    },
  ];
}

function energyRows({ comparison, paired }: Comparison): Row[] {
  const c = comparison;
  const pairs = pairDeviations(c.deviations);
  const kcal = "kcal/mol";
  const rare = c.n < 4 ? "not given below four conformers" : "a level is constant";
  const correlationNote = (value: number | null) => (value === null ? rare : undefined);
  const span = (list: Float64Array) => list.reduce((m, v) => Math.max(m, v), Number.NEGATIVE_INFINITY);
  const low = (list: Float64Array) => list.reduce((m, v) => Math.min(m, v), Number.POSITIVE_INFINITY);
  const range = fixed(span(paired.reference) - low(paired.reference), 2);
  const d = (
    <>
      d<sub>i</sub> = a<sub>i</sub> − b<sub>i</sub> − offset
    </>
  );
  return [
    {
      label: "Mean signed deviation",
      name: "Mean signed deviation",
      value: c.msd,
      digits: 2,
      unit: kcal,
      formula: <>MSD = Σ d / n, {d}</>,
      ...(c.align === "least-squares" ? { note: "0 by this choice of zero" } : { interval: "msd" as const }),
    },
    {
      label: "Mean absolute deviation",
      name: "Mean absolute deviation",
      value: c.mad,
      digits: 2,
      unit: kcal,
      formula: <>MAD = Σ |d| / n, {d}</>,
      interval: "mad",
    },
    {
      label: "Root mean square deviation",
      name: "Root mean square deviation",
      value: c.rmsd,
      digits: 2,
      unit: kcal,
      formula: (
        <>
          RMSD = √(Σ d<sup>2</sup> / n), {d}
        </>
      ),
      interval: "rmsd",
    },
    {
      label: "Standard deviation",
      name: "Standard deviation",
      value: c.sd,
      digits: 2,
      unit: kcal,
      formula: (
        <>
          SD = √(Σ (d − mean d)<sup>2</sup> / (n − 1)); the same for every zero of energy
        </>
      ),
      interval: "sd",
      note: "what to take as the error of the level",
    },
    {
      label: `Largest, ${paired.members[c.maxPlace]?.name ?? ""}`,
      name: "Largest deviation",
      value: c.max,
      digits: 2,
      unit: kcal,
      formula: <>max |d|, {d}</>,
      interval: "max",
    },
    ...withoutZero(c),
    ...(pairs
      ? [
          {
            label: "Between two, mean",
            name: "Mean absolute difference of pairs",
            value: pairs.meanAbsolute,
            digits: 2,
            unit: kcal,
            formula: (
              <>
                mean of |d<sub>i</sub> − d<sub>j</sub>| over all pairs: no zero enters
              </>
            ),
          },
          {
            label: "Between two, root mean square",
            name: "Root mean square difference of pairs",
            value: pairs.rms,
            digits: 2,
            unit: kcal,
            formula: <>√2 SD: no zero enters</>,
          },
        ]
      : []),
    {
      label: "Pearson r",
      name: "Pearson correlation",
      value: c.pearson,
      digits: 3,
      unit: "",
      formula: <>r of a and b; it grows with the range of energies</>,
      interval: "pearson",
      note: correlationNote(c.pearson) ?? `over ${range} kcal/mol`,
    },
    {
      label: "Spearman ρ",
      name: "Spearman correlation",
      value: c.spearman,
      digits: 3,
      unit: "",
      formula: <>Pearson's r of the ranks; equal energies share the mean rank</>,
      interval: "spearman",
      note: correlationNote(c.spearman),
    },
    {
      label: (
        <>
          Kendall τ<sub>b</sub>
        </>
      ),
      name: "Kendall correlation",
      value: c.kendall,
      digits: 3,
      unit: "",
      formula: (
        <>
          τ<sub>b</sub> = (C − D) / √((n<sub>0</sub> − n<sub>1</sub>)(n<sub>0</sub> − n<sub>2</sub>))
        </>
      ),
      interval: "kendall",
      note: correlationNote(c.kendall),
    },
  ];
}

function populationRows({ comparison: c, paired }: Comparison): Row[] {
  return [
    {
      label: "Population overlap",
      name: "Population overlap",
      value: c.populationOverlap,
      digits: 1,
      unit: "%",
      factor: 100,
      formula: <>Σ min(p, q)</>,
      interval: "populationOverlap",
    },
    {
      label: "Jensen-Shannon divergence",
      name: "Jensen-Shannon divergence",
      value: c.jensenShannon,
      digits: 3,
      unit: "bit",
      formula: <>H((p + q)/2) − (H(p) + H(q))/2; 0 equal, 1 nothing shared; its root is a distance</>,
      interval: "jensenShannon",
      note: `root ${fixed(Math.sqrt(c.jensenShannon), 3)}`,
    },
    {
      label: "Kullback-Leibler divergence",
      name: "Kullback-Leibler divergence of the reference from the level",
      value: c.klReferenceLevel,
      digits: 3,
      unit: "nat",
      formula: <>Σ q ln(q/p), p at the level, q at the reference</>,
      note: `of the reference from the level; the other way ${Number.isFinite(c.klLevelReference) ? fixed(c.klLevelReference, 3) : "infinite"}`,
    },
    ...[1, 2, 3, 5, 10]
      .filter((k) => k < c.n)
      .map((k) => {
        const top = topAgreement(paired.level, paired.reference, k);
        const tied = Math.max(top.levelCount, top.referenceCount) > k;
        return {
          label: k === 1 ? "Same lowest conformer" : `Of the ${k} lowest, in common`,
          name: `Of the ${k} lowest, in common`,
          value: top.common,
          digits: 0,
          text: `${top.common} of ${Math.max(top.levelCount, top.referenceCount)}`,
          unit: "",
          formula: <>conformers among the {k} lowest of both levels</>,
          note: tied
            ? `with ties ${top.levelCount} at the level, ${top.referenceCount} at the reference`
            : undefined,
        };
      }),
  ];
}
