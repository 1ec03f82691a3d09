import {
  capital,
  fixed,
  formatCount,
  formatEnergy,
  formatPercent,
  formatTemperature,
  formatWindowAsSet,
  formatWindowToCarry,
  MINUS,
  plural,
  trimmed,
  withUnit,
} from "../format.ts";
import { shareWords } from "../workbench/findings.ts";
import { toCsv } from "../workbench/tsv.ts";
import type { PlanOutcome, StepOutcome } from "./evaluate.ts";
import type { FrontPoint } from "./front.ts";
import { RULES } from "./hours.ts";
import type { Cut, HoursSource, Plan } from "./plan.ts";
import type { PlansReport } from "./report.ts";
import { START_VALUES } from "./start.ts";

/** Core hours as one would say them. */
export function formatHours(hours: number): string {
  if (hours === 0) return "0";
  if (hours < 0) return `${MINUS}${formatHours(-hours)}`;
  if (hours >= 99.5) return formatCount(Math.round(hours));
  if (hours >= 9.95) return trimmed(hours, 1);
  if (hours >= 0.01) return fixed(hours, 2);
  return trimmed(hours, Math.min(20, 1 - Math.floor(Math.log10(hours))));
}

const coreHours = (hours: number) => withUnit(formatHours(hours), "core hours");
const kcal = (value: number) => withUnit(formatEnergy(value), "kcal/mol");

/**
 * The window of a step in kcal/mol, without the unit: as it was set, or, read off for a share, rounded up so that the
 * printed number carries who is said to be carried. An en dash where all are carried.
 */
export function windowFigure(cut: Cut, { windowKcal, nextKcal }: StepOutcome): string {
  return cut.by === "window" ? formatWindowAsSet(cut.kcal) : formatWindowToCarry(windowKcal, nextKcal);
}

/**
 * What a plan costs, in core hours: 0 where all its energies are known; "not known" or "at least" where hours of a step are.
 *
 * @example costFigure(plan, outcome) // "at least 10.6"
 */
export function costFigure(plan: Plan, outcome: PlanOutcome): string {
  return figureOf(plan, outcome.cost);
}

/**
 * Hours that a plan waits for its jobs, with the same words as its cost.
 *
 * @example waitingFigure(plan, outcome) // "not known"
 */
export function waitingFigure(plan: Plan, outcome: PlanOutcome): string {
  return figureOf(plan, outcome.wall);
}

function figureOf(plan: Plan, hours: number): string {
  if (!hoursOpen(plan)) return formatHours(hours);
  return hours > 0 ? `at least ${formatHours(hours)}` : "not known";
}

/** True where the hours of a step are not known: such a plan has no cost to weigh. */
export const hoursOpen = (plan: Plan) => plan.steps.some(({ hours }) => hours.from === "unknown");

/** Nothing is left to compute. */
const costsNothing = (plan: Plan) => plan.steps.every(({ hours }) => hours.from === "known");

function costWords(plan: Plan, outcome: PlanOutcome): string {
  if (costsNothing(plan)) return `energies known, ${coreHours(0)}`;
  const figure = costFigure(plan, outcome);
  return figure === "not known" ? "core hours not known" : withUnit(figure, "core hours");
}

/** What the plan says first. */
export function planFinding(plan: Plan, startName: string, outcome: PlanOutcome, front: FrontPoint[] | null) {
  const parts = plan.steps.map((step, s) => {
    const window = windowFigure(step.cut, outcome.steps[s]!);
    const from = s === 0 ? startName : plan.steps[s - 1]!.name;
    const what =
      outcome.steps[s]!.windowKcal === null
        ? `everything of ${from}`
        : s === 0
          ? `${withUnit(window, "kcal/mol")} of ${from}`
          : window;
    return `${what} to ${step.name}`;
  });
  const counts = outcome.steps.map((step) => formatCount(Math.round(step.carried.mean)));
  const { kept } = outcome;
  const range = `${formatPercent(kept.low, 1)} to ${formatPercent(kept.high, 1)}`;
  return {
    text:
      `Carry ${parts.join(", then ")}: ${joinCounts(counts)}, ${costWords(plan, outcome)}, ` +
      `about ${shareWords(kept.mean)} of the final population.`,
    second:
      (kept.high - kept.low < 1e-9
        ? "All energies are taken as exact."
        : `With the errors assumed below, ${range}.`) + furtherWords(plan, outcome, front),
  };
}

function joinCounts(counts: readonly string[]): string {
  const last = counts.at(-1)!;
  const noun = counts.length === 1 && last === "1" ? "structure" : "structures";
  return counts.length === 1 ? `${last} ${noun}` : `${counts.slice(0, -1).join(", ")} and ${last} ${noun}`;
}

/** What 99 % would cost beyond this plan, from the cheapest windows that reach it. */
function furtherWords(plan: Plan, outcome: PlanOutcome, front: FrontPoint[] | null): string {
  // Without a cost, or with a part of it, there is nothing to weigh.
  if (costsNothing(plan) || hoursOpen(plan)) return "";
  const target = 0.99;
  const at = front?.find((point) => point.kept >= target);
  if (!at || outcome.kept.mean >= target) return "";
  const more = at.cost - outcome.cost;
  if (more <= 0) return ` Other windows reach 99 % for ${coreHours(at.cost)}.`;
  const each = more / (100 * (at.kept - outcome.kept.mean));
  return ` To reach 99 % costs ${coreHours(more)} more, ${formatHours(each)} for each further percent.`;
}

export interface Assumption {
  origin: "your timings" | "rule of thumb" | "typed in" | "starting value" | "not known";
  /** Bold clause. */
  what: string;
  /** What the result becomes if it is wrong. */
  wrong: string;
}

/** Everything that a plan takes for granted, and what hangs on it. */
export function planAssumptions(
  plan: Plan,
  outcome: PlanOutcome,
  report: PlansReport,
  atoms: number,
): Assumption[] {
  const hours = plan.steps.flatMap((step, s): Assumption[] => {
    if (step.hours.from === "known") return [];
    if (step.hours.from === "unknown") {
      return [
        {
          origin: "not known",
          what: `Core hours for a structure at ${step.name}`,
          wrong: "Set them in the table of the steps: until then the cost leaves this step out.",
        },
      ];
    }
    const { hoursEach, cost, exponent, exponentFitted } = outcome.steps[s]!;
    const other = hoursEach * 2;
    return [
      {
        origin: originOf(step.hours),
        what: `${coreHours(hoursEach)} for a structure at ${step.name}`,
        wrong: `${hoursWords(step.hours, exponent, exponentFitted, atoms)} At ${formatHours(other)} the plan costs ${formatHours(outcome.cost + cost)}.`,
      },
    ];
  });
  const errors = report.variants.map((variant): Assumption => {
    const at = variant.of;
    const last = plan.steps.at(-1)!;
    const between =
      at === "truth"
        ? `on the energies of ${last.name}`
        : `between ${at === 0 ? "the start" : plan.steps[at - 1]!.name} and ${plan.steps[at]!.name}`;
    const sigma = at === "truth" ? plan.truthSigma : plan.steps[at]!.sigma;
    const start = at === "truth" ? START_VALUES.knownSigma : START_VALUES.sigma;
    return {
      origin: setOr(sigma === start),
      what: `± ${kcal(sigma)} ${between}`,
      wrong: `Independent for each conformer. At ± ${formatEnergy(variant.sigma)} the plan keeps ${formatPercent(variant.mean)}, ${formatPercent(variant.low)} to ${formatPercent(variant.high)}.`,
    };
  });
  return [
    ...hours,
    ...errors,
    {
      origin: setOr(plan.failRate === START_VALUES.failRate),
      what: `${formatPercent(plan.failRate)} of the jobs are repeated`,
      wrong: "None is lost for good, and a repeat costs as much as the first.",
    },
    {
      origin: setOr(plan.slots === START_VALUES.slots && plan.coresPerSlot === START_VALUES.coresPerSlot),
      what: `${plural(plan.slots, "slot")} of ${plural(plan.coresPerSlot, "core")}`,
      wrong: "Jobs start together in rounds and use their cores fully; a queue before them is not counted.",
    },
    {
      origin: "not known",
      what: "Structures may fall together at the next level",
      wrong: "None is assumed to, so the cost is an upper bound.",
    },
    {
      origin: "not known",
      what: "Shapes the search never found",
      wrong: "They are in no figure here: no window brings them back.",
    },
  ];
}

const setOr = (start: boolean): Assumption["origin"] => (start ? "starting value" : "typed in");

function originOf(source: HoursSource): Assumption["origin"] {
  if (source.from === "rule") return "rule of thumb";
  return source.from === "typed" ? "typed in" : "your timings";
}

function hoursWords(
  source: Exclude<HoursSource, { from: "known" | "unknown" }>,
  exponent: number | null,
  fitted: boolean,
  atoms: number,
): string {
  if (source.from === "typed") return "As typed.";
  if (source.from === "timings") return `Mean of ${plural(source.hours.length, "finished one")}.`;
  if (source.from === "rule") {
    const rule = RULES.find(({ id }) => id === source.rule);
    return `${capital(rule?.label ?? source.rule)}: common practice, no source, scaled to ${plural(atoms, "atom")} by the power ${trimmed(exponent, 2)}.`;
  }
  const sizes = source.timings.map((t) => formatCount(t.atoms)).join(", ");
  return `From timings at ${sizes} atoms, ${fitted ? "fitted" : "typed"} power ${trimmed(exponent, 2)} of the size.`;
}

/** The plan as text for the methods part of a report. */
export function planText(plan: Plan, startName: string, outcome: PlanOutcome, of: number): string {
  const sentences = plan.steps.map((step, s) => {
    const { windowKcal, carried } = outcome.steps[s]!;
    const before = s === 0 ? startName : plan.steps[s - 1]!.name;
    const number = formatCount(Math.round(carried.mean));
    const who =
      windowKcal === null
        ? `All conformers (${number})`
        : `${s === 0 ? "All conformers" : "Those"} within ${withUnit(windowFigure(step.cut, outcome.steps[s]!), "kcal/mol")} of the lowest at ${before} (${number} of ${s === 0 ? formatCount(of) : formatCount(Math.round(outcome.steps[s - 1]!.carried.mean))})`;
    return step.hours.from === "known"
      ? `${who} are carried to ${step.name}, where their energies are known.`
      : `${who} are to be computed at ${step.name}.`;
  });
  const errors = plan.steps
    .flatMap((step, s) => {
      const before = s === 0 ? startName : plan.steps[s - 1]!.name;
      return step.level === null ? [`${kcal(step.sigma)} between ${before} and ${step.name}`] : [];
    })
    .concat(plan.truthSigma > 0 ? [`${kcal(plan.truthSigma)} on ${plan.steps.at(-1)!.name}`] : []);
  const { kept } = outcome;
  const drawn = `(${formatCount(outcome.draws)} draws, ${outcome.generator}, seed ${outcome.seed})`;
  const keeps = `the plan keeps ${formatPercent(kept.mean, 1)} of the population at ${withUnit(formatTemperature(plan.temperatureK), "K")}`;
  const sure =
    errors.length > 0
      ? `With independent normal errors of ${errors.join(" and ")} ${drawn} ${keeps} (95 % range ${formatPercent(kept.low, 1)} to ${formatPercent(kept.high, 1)}).`
      : `With the energies as they are ${keeps}.`;
  const cost = costSentence(plan, outcome);
  return [...sentences, sure, cost].join(" ");
}

function costSentence(plan: Plan, outcome: PlanOutcome): string {
  if (costsNothing(plan)) return `All energies are known: ${coreHours(0)}.`;
  const open = plan.steps.filter(({ hours }) => hours.from === "unknown").map(({ name }) => name);
  const without = open.length > 0 ? `The core hours at ${open.join(" and ")} are not known.` : "";
  if (outcome.cost === 0 && without) return without;
  const rest = without ? `${without} Without them, estimated` : "Estimated";
  return `${rest} cost ${coreHours(outcome.cost)}, ${formatPercent(plan.failRate)} repeats included; ${withUnit(formatHours(outcome.wall), "h")} on ${plural(plan.slots, "slot")} of ${plural(plan.coresPerSlot, "core")}.`;
}

/** The plan as a table: RFC 4180, one row a step, then the sum. */
export function planCsv(plan: Plan, startName: string, outcome: PlanOutcome): string {
  const rows = plan.steps.map((step, s) => {
    const o = outcome.steps[s]!;
    return [
      s + 1,
      s === 0 ? startName : plan.steps[s - 1]!.name,
      o.windowKcal,
      step.name,
      step.level === null ? "predicted" : "known",
      o.in.mean,
      o.carried.mean,
      o.carried.low,
      o.carried.high,
      ...(step.hours.from === "unknown" ? [null, null, null] : [o.hoursEach, o.cost, o.wall]),
      100 * o.kept.mean,
      100 * o.kept.low,
      100 * o.kept.high,
    ];
  });
  const { kept } = outcome;
  const total = hoursOpen(plan) ? [null, null] : [outcome.cost, outcome.wall];
  const sum = ["", "together", null, "", "", null, null, null, null, null, ...total];
  return toCsv(
    [
      "step",
      "level before",
      "window [kcal/mol]",
      "level",
      "energies",
      "in",
      "carried",
      "carried at 2.5 %",
      "carried at 97.5 %",
      "each [core hours]",
      "cost [core hours]",
      "waiting [h]",
      "kept [%]",
      "kept at 2.5 % [%]",
      "kept at 97.5 % [%]",
    ],
    [...rows, [...sum, 100 * kept.mean, 100 * kept.low, 100 * kept.high]],
  );
}
