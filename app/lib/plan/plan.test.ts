import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { windowToCarry } from "../format.ts";
import { compareLevels } from "../levels/compare.ts";
import { alternativesCsv } from "./alternatives-csv.ts";
import { evaluatePlan, type PlanData } from "./evaluate.ts";
import { marginalCosts, planFront } from "./front.ts";
import { defaultHours, hoursEach, RULES } from "./hours.ts";
import { type Plan, type PlanStep, planSetSchema } from "./plan.ts";
import { planReport } from "./report.ts";
import { drawsOfPlan, firstPlans } from "./start.ts";
import {
  costFigure,
  formatHours,
  planAssumptions,
  planCsv,
  planFinding,
  planText,
  windowFigure,
} from "./words.ts";

const T = 298.15;
const CHEAP = [0.3, 0, 1.4, 1.1, 2.9, 2.5];
const REFERENCE = [0, 0.4, 0.9, 1.5, 2.2, 3];
const plain = (text: string) => text.replaceAll("\u00a0", " ");

const step = (part: Partial<Plan["steps"][number]> = {}): Plan["steps"][number] => ({
  level: "reference",
  name: "Better",
  cut: { by: "all" },
  hours: { from: "typed", hours: 3.4 },
  sigma: 0,
  ...part,
});
const plan = (part: Partial<Plan> = {}): Plan => ({
  version: 1,
  start: "cheap",
  steps: [step()],
  temperatureK: T,
  truthSigma: 0,
  failRate: 0.04,
  slots: 8,
  coresPerSlot: 4,
  draws: 2,
  seed: 412,
  ...part,
});
const data = (part: Partial<PlanData> = {}): PlanData => ({
  start: CHEAP,
  known: [REFERENCE],
  weights: new Float64Array(6).fill(1),
  atoms: 32,
  ...part,
});

describe("hours of one structure", () => {
  it("is the mean of the molecule's own timings", () => {
    expect(hoursEach({ from: "timings", hours: [3, 3.4, 3.8] }, 32).hours).toBeCloseTo(3.4, 12);
  });

  it("fits the power of the size to two timings: t = t0 (N/N0)^alpha", () => {
    const found = hoursEach(
      {
        from: "scaled",
        timings: [
          { atoms: 20, hours: 1 },
          { atoms: 40, hours: 8 },
        ],
        exponent: 5,
      },
      30,
    );
    expect(found.exponent).toBeCloseTo(3, 12);
    expect(found.hours).toBeCloseTo(1.5 ** 3, 12);
    expect(found.fitted).toBe(true);
  });

  it("takes the typed power for one size, through the geometric mean of its timings", () => {
    const timings = [
      { atoms: 20, hours: 1 },
      { atoms: 20, hours: 4 },
    ];
    const found = hoursEach({ from: "scaled", timings, exponent: 2 }, 40);
    expect(found.hours).toBeCloseTo(8, 12);
    expect(found.fitted).toBe(false);
  });

  it("scales rules of thumb, each at its own size as it stands", () => {
    for (const rule of RULES)
      expect(hoursEach({ from: "rule", rule: rule.id }, rule.atoms).hours).toBeCloseTo(rule.hours, 12);
    expect(hoursEach({ from: "rule", rule: "mp2-energy" }, 80).hours).toBeCloseTo(4 * 32, 9);
    expect(() => hoursEach({ from: "rule", rule: "none" }, 10)).toThrow(RangeError);
  });
});

describe("six conformers, energies exact (worked by hand)", () => {
  it("keeps what the window curve says and costs n t (1 + f)", () => {
    const found = evaluatePlan(plan({ steps: [step({ cut: { by: "window", kcal: 1.4 } })] }), data());
    expect(found.steps[0]!.carried.mean).toBe(4);
    expect(found.kept.mean).toBeCloseTo(0.98329, 5);
    expect(found.cost).toBeCloseTo(4 * 3.4 * 1.04, 10);
    // Four jobs on eight slots are one round of 3.4 core hours on 4 cores.
    expect(found.wall).toBeCloseTo((3.4 * 1.04) / 4, 10);
    expect(found.lowestKept).toBe(1);
  });

  it("prints the window of a share so that these digits carry as many and keep as much", () => {
    const odd = data({ start: [0.3, 0, 1.404877, 1.1, 2.9, 2.5] });
    const share = plan({ steps: [step({ cut: { by: "share", share: 0.95 } })] });
    const found = evaluatePlan(share, odd);
    const first = found.steps[0]!;
    expect([first.windowKcal, first.nextKcal]).toEqual([1.404877, 2.5]);
    expect(windowFigure(share.steps[0]!.cut, first)).toBe("1.41");
    expect(plain(planFinding(share, "Cheap", found, null).text)).toContain("Carry 1.41 kcal/mol of Cheap");
    const kcal = windowToCarry(first.windowKcal!, first.nextKcal);
    const set = evaluatePlan(plan({ steps: [step({ cut: { by: "window", kcal } })] }), odd);
    expect(set.steps[0]!.carried).toEqual(first.carried);
    expect(set.kept).toEqual(found.kept);
    expect(windowFigure({ by: "window", kcal: 1.4005 }, first)).toBe("1.4005");
  });

  it("finds the window of a share", () => {
    const window = (share: number) =>
      evaluatePlan(plan({ steps: [step({ cut: { by: "share", share } })] }), data()).steps[0]!.windowKcal;
    expect(window(0.9)).toBeCloseTo(1.4, 12);
    expect(window(0.95)).toBeCloseTo(1.4, 12);
    expect(window(0.99)).toBeCloseTo(2.9, 12);
  });

  it("starts each window at the lowest that was carried there", () => {
    // The first cut leaves only c2 (0.0 at the cheap level); at the reference it is its own lowest.
    const two = plan({
      steps: [
        step({ cut: { by: "window", kcal: 0.1 } }),
        step({ level: "third", name: "Best", cut: { by: "window", kcal: 0 } }),
      ],
    });
    const found = evaluatePlan(two, data({ known: [REFERENCE, REFERENCE] }));
    expect(found.steps.map((s) => s.carried.mean)).toEqual([1, 1]);
    expect(found.kept.mean).toBeCloseTo(0.27694, 5);
    expect(found.lowestKept).toBe(0);
  });

  it("adds two levels and waits in rounds: 21 and 18 structures on 8 slots of 4 cores", () => {
    // 3 x 3.4/4 x 1.04 + 3 x 9.6/4 x 1.04 = 10.14 h; 21 x 3.4 x 1.04 + 18 x 9.6 x 1.04 = 254.0 core hours.
    const n = 31;
    const energies = Float64Array.from({ length: n }, (_, i) => i / 10);
    const chain = plan({
      steps: [
        step({ cut: { by: "window", kcal: 2 } }),
        step({ name: "Best", cut: { by: "window", kcal: 1.7 }, hours: { from: "typed", hours: 9.6 } }),
      ],
    });
    const found = evaluatePlan(chain, {
      start: energies,
      known: [energies, energies],
      weights: new Float64Array(n).fill(1),
      atoms: 32,
    });
    expect(found.steps.map((s) => s.carried.mean)).toEqual([21, 18]);
    expect(found.cost).toBeCloseTo(253.97, 2);
    expect(found.wall).toBeCloseTo(10.14, 2);
  });
});

describe("errors", () => {
  it("with a predicted level the true lowest survives in Phi(w/(s sqrt 2)) of the draws (normal distribution)", () => {
    // The window ends just below the one competitor, w = 2 sqrt(2) s up: the carried one is truly lowest in Phi(2).
    const s = 0.5;
    const w = 2 * Math.SQRT2 * s;
    const found = evaluatePlan(
      plan({
        draws: 40_000,
        steps: [step({ level: null, sigma: s, cut: { by: "window", kcal: w - 0.01 } })],
      }),
      { start: [0, w], known: [null], weights: [1, 1], atoms: 10 },
    );
    expect(Math.abs(found.lowestKept - 0.97725)).toBeLessThan(0.003);
  });

  it("gives the same digits from the same seed, others from another", () => {
    const p = plan({ draws: 200, truthSigma: 0.3, steps: [step({ cut: { by: "share", share: 0.9 } })] });
    expect(evaluatePlan(p, data())).toEqual(evaluatePlan(p, data()));
    expect(evaluatePlan({ ...p, seed: 1 }, data()).kept.mean).not.toBe(evaluatePlan(p, data()).kept.mean);
  });

  it("a wider window never keeps less and never costs less", () => {
    const energy = fc.integer({ min: 0, max: 40 }).map((k) => k / 8);
    fc.assert(
      fc.property(
        fc.array(fc.tuple(energy, energy), { minLength: 1, maxLength: 12 }),
        energy,
        energy,
        (list, a, b) => {
          const own = {
            start: list.map((x) => x[0]),
            known: [list.map((x) => x[1])],
            weights: list.map(() => 1),
            atoms: 10,
          };
          const at = (kcal: number) =>
            evaluatePlan(
              plan({ draws: 20, truthSigma: 0.2, steps: [step({ cut: { by: "window", kcal } })] }),
              own,
            );
          const [narrow, wide] = [at(Math.min(a, b)), at(Math.max(a, b))];
          expect(wide.kept.mean).toBeGreaterThanOrEqual(narrow.kept.mean - 1e-12);
          expect(wide.cost).toBeGreaterThanOrEqual(narrow.cost - 1e-12);
          expect(wide.lowestKept).toBeGreaterThanOrEqual(narrow.lowestKept);
        },
      ),
      { seed: 20261201, numRuns: 60 },
    );
  });
});

describe("cheapest windows", () => {
  it("with one cut are the steps of the window curve", () => {
    const front = planFront(plan(), data())!;
    const { referencePopulations: q } = compareLevels({
      level: CHEAP,
      reference: REFERENCE,
      temperatureK: T,
    });
    expect(front.map((p) => p.kept.toFixed(5))).toEqual([
      "0.27694",
      "0.82093",
      "0.86419",
      "0.98329",
      "0.98673",
      "1.00000",
    ]);
    expect(front[1]!.kept).toBeCloseTo(q[0]! + q[1]!, 12);
    expect(front.map((p) => p.cost / (3.4 * 1.04))).toEqual(
      [1, 2, 3, 4, 5, 6].map((k) => expect.closeTo(k, 9)),
    );
  });

  it("are beaten by no pair of windows, tried one by one", () => {
    const two = plan({ steps: [step(), step({ name: "Best", hours: { from: "typed", hours: 9 } })] });
    const own = data({ known: [REFERENCE, REFERENCE] });
    const front = planFront(two, own)!;
    for (const w1 of [0, 0.3, 1.1, 1.4, 2.5, 2.9]) {
      for (const w2 of [0, 0.4, 0.5, 0.9, 1.1, 1.5, 2.2, 3]) {
        const tried = evaluatePlan(
          {
            ...two,
            steps: two.steps.map((s, k) => ({ ...s, cut: { by: "window", kcal: k === 0 ? w1 : w2 } })),
          },
          own,
        );
        const best = front.filter((p) => p.cost <= tried.cost + 1e-9).at(-1);
        expect(best?.kept ?? 0).toBeGreaterThanOrEqual(tried.kept.mean - 1e-9);
      }
    }
  });

  it("are not drawn where a window lies at a level that is only predicted", () => {
    const two = plan({ steps: [step({ level: null, sigma: 0.3 }), step()] });
    expect(planFront(two, data({ known: [null, REFERENCE] }))).toBeNull();
  });

  it("give the cost of each further percent between plans", () => {
    expect(
      marginalCosts([
        { kept: 0.95, cost: 74 },
        { kept: 0.9, cost: 60 },
        { kept: 0.95, cost: 80 },
      ]),
    ).toEqual([expect.closeTo(2.8, 9), null, null]);
  });
});

describe("words", () => {
  const p = plan({ draws: 2, steps: [step({ cut: { by: "window", kcal: 1.1 } })] });
  const own = data();
  const report = planReport([p], 0, [own]);
  const outcome = report.outcomes[0]!;

  it("says the plan and what more would cost", () => {
    const finding = planFinding(p, "Cheap", outcome, report.front);
    expect(plain(finding.text)).toBe(
      "Carry 1.10 kcal/mol of Cheap to Better: 3 structures, 10.6 core hours, about 86 % of the final population.",
    );
    expect(plain(finding.second)).toBe(
      "All energies are taken as exact. To reach 99 % costs 10.6 core hours more, 0.78 for each further percent.",
    );
  });

  it("lists what is assumed with its origin", () => {
    const list = planAssumptions(p, outcome, report, 32);
    expect(list.map((a) => a.origin)).toEqual([
      ...["typed in", "typed in"],
      // Repeats and slots as every plan begins with: nobody has set them.
      ...["starting value", "starting value"],
      "not known",
      "not known",
    ]);
    expect(plain(list[0]!.what)).toBe("3.40 core hours for a structure at Better");
    expect(plain(list[0]!.wrong)).toContain("At 6.80 the plan costs 21.2.");
    expect(plain(list[1]!.wrong)).toContain("At ± 0.20 the plan keeps");
  });

  it("writes the paragraph and the table", () => {
    expect(plain(planText(p, "Cheap", outcome, 6))).toBe(
      "All conformers within 1.10 kcal/mol of the lowest at Cheap (3 of 6) are to be computed at Better. " +
        "With the energies as they are the plan keeps 86.4 % of the population at 298.15 K. " +
        "Estimated cost 10.6 core hours, 4 % repeats included; 0.88 h on 8 slots of 4 cores.",
    );
    const lines = planCsv(p, "=Cheap", outcome).trimEnd().split("\r\n");
    expect(lines).toHaveLength(3);
    expect(lines[1]!.startsWith("1,'=Cheap,1.1,Better,known,6,3,3,3,3.4,")).toBe(true);
    expect(lines[0]!.split(",").length).toBe(15);
    for (const line of lines) expect(line.split('"').length % 2).toBe(1);
  });

  it.each([
    [0, "0"],
    [0.00034, "0.00034"],
    [3.4, "3.40"],
    [10.607, "10.6"],
    [253.97, "254"],
    [12345.6, "12,346"],
  ])("writes %f core hours as %s", (value, text) => {
    expect(formatHours(value)).toBe(text);
  });
});

describe("hours that nobody has set", () => {
  it("are none for known energies, else follow the kind of the name, else are not known", () => {
    expect(defaultHours("UFF", true)).toEqual({ from: "known" });
    expect(defaultHours("UFF", false)).toEqual({ from: "rule", rule: "force-field" });
    expect(defaultHours("PM7", false)).toEqual({ from: "rule", rule: "semi-empirical" });
    expect(defaultHours("HF/STO-3G", false)).toEqual({ from: "rule", rule: "hf-optimise" });
    expect(defaultHours("PBE0", false)).toEqual({ from: "rule", rule: "dft-optimise" });
    expect(defaultHours("MP2", false)).toEqual({ from: "rule", rule: "mp2-energy" });
    expect(defaultHours("CCSD(T)/CBS", false)).toEqual({ from: "rule", rule: "cc-energy" });
    for (const name of ["next level", "experiment"])
      expect(defaultHours(name, false)).toEqual({ from: "unknown" });
    for (const name of ["UFF", "PM7", "HF", "PBE0", "MP2", "CCSD(T)"])
      expect(hoursEach(defaultHours(name, false), 40).hours).toBeGreaterThan(0);
  });

  it("cost nothing where the energies are known, and the plan says so", () => {
    const free = plan({ steps: [step({ hours: { from: "known" }, cut: { by: "window", kcal: 1.1 } })] });
    const report = planReport([free], 0, [data()]);
    const outcome = report.outcomes[0]!;
    expect([outcome.cost, outcome.wall]).toEqual([0, 0]);
    const finding = planFinding(free, "Cheap", outcome, report.front);
    expect(plain(finding.text)).toContain("3 structures, energies known, 0 core hours, about 86 %");
    expect(plain(finding.second)).toBe("All energies are taken as exact.");
    expect(plain(planText(free, "Cheap", outcome, 6))).toContain("All energies are known: 0 core hours.");
    expect(planAssumptions(free, outcome, report, 32).some((a) => a.what.includes("core hours"))).toBe(false);
  });

  it("are asked for where they are not known, and left out of what is known", () => {
    const open = step({ name: "Next", hours: { from: "unknown" } });
    const cost = (steps: PlanStep[]) => {
      const p = plan({ steps });
      const report = planReport([p], 0, [data({ known: steps.map(() => REFERENCE) })]);
      const outcome = report.outcomes[0]!;
      return {
        figure: costFigure(p, outcome),
        text: plain(planFinding(p, "Cheap", outcome, report.front).text),
        asked: planAssumptions(p, outcome, report, 32)[0]!,
        paragraph: plain(planText(p, "Cheap", outcome, 6)),
        csv: planCsv(p, "Cheap", outcome),
      };
    };
    const alone = cost([open]);
    expect(alone.figure).toBe("not known");
    expect(alone.text).toContain("6 structures, core hours not known,");
    expect(alone.asked).toMatchObject({ origin: "not known", what: "Core hours for a structure at Next" });
    expect(alone.paragraph.endsWith("The core hours at Next are not known.")).toBe(true);
    expect(alone.csv).toContain("1,Cheap,,Next,known,6,6,6,6,,,,");
    const both = cost([step(), open]);
    expect(both.figure).toBe("at least 21.2");
    expect(both.paragraph).toContain(
      "The core hours at Next are not known. Without them, estimated cost 21.2",
    );
  });
});

describe("a first set of plans", () => {
  it("goes from the first level to the last, or to one that is predicted", () => {
    const options = { sift: null, temperatureK: T, n: 31 };
    const two = firstPlans(
      [
        { id: "a", name: "A" },
        { id: "b", name: "B" },
      ],
      options,
    );
    expect(planSetSchema.parse(two)).toEqual(two);
    expect(two.plans.map((one) => one.name)).toEqual(["Narrow", "Middle", "Wide", "Everything"]);
    expect(two.plans[1]!.plan.steps[0]).toMatchObject({ level: "b", name: "B", hours: { from: "known" } });
    expect(firstPlans([{ id: "a", name: "A" }], options).plans[0]!.plan.steps[0]!.level).toBeNull();
    expect(() => firstPlans([], options)).toThrow(RangeError);
  });

  it("takes as many draws as a page can wait for", () => {
    expect([31, 505, 50_000].map(drawsOfPlan)).toEqual([10_000, 4950, 500]);
  });
});

it("plans side by side as a file: what each keeps, costs, and what each further percent costs", () => {
  const narrow = plan({ steps: [step({ cut: { by: "window", kcal: 1.1 } })] });
  const wide = plan({ steps: [step({ cut: { by: "window", kcal: 1.4 } })] });
  const open = plan({ steps: [step({ hours: { from: "unknown" } })] });
  const plans = [narrow, wide, open].map((one, k) => ({ name: ["Narrow", "Wide", "Open"][k]!, plan: one }));
  const outcomes = plans.map((one) => evaluatePlan(one.plan, data()));
  const text = alternativesCsv({ version: 1, sift: null, chosen: 1, plans }, outcomes);
  const [head, ...rows] = text
    .trim()
    .split("\r\n")
    .map((line) => line.split(","));
  const of = (name: string, k: number) => rows[k]![head!.indexOf(name)];
  expect(rows.map(([name, here]) => [name, here])).toEqual([
    ["Narrow", "no"],
    ["Wide", "yes"],
    ["Open", "no"],
  ]);
  // Kept by hand: 0.86419 within 1.1, 0.98329 within 1.4 kcal/mol; 3 and 4 structures of 3.4 h with 4 % repeats.
  expect(Number(of("kept [%]", 0))).toBeCloseTo(86.419, 2);
  expect(Number(of("kept [%]", 1))).toBeCloseTo(98.329, 2);
  expect(Number(of("lost [%]", 1))).toBeCloseTo(100 - 98.329, 2);
  expect([of("structures 1", 0), of("structures 1", 1), of("structures 1", 2)]).toEqual(["3", "4", "6"]);
  expect(Number(of("cost [core hours]", 1))).toBeCloseTo(4 * 3.4 * 1.04, 9);
  expect(Number(of("each percent above the last [core hours]", 1))).toBeCloseTo(
    (3.4 * 1.04) / (98.3288 - 86.4192),
    3,
  );
  expect([of("cost [core hours]", 2), of("window 1 [kcal/mol]", 2)]).toEqual(["", "all"]);
});
