import { describe, expect, it } from "vitest";
import { alternativesCsv, marginalOf, orderOf } from "./alternatives-csv.ts";
import { alignPlans, carriedOn, computedAnew, withChosen, withoutStep, withStep } from "./chain.ts";
import { evaluatePlan } from "./evaluate.ts";
import { keptOrder, marginalCosts } from "./front.ts";
import { type PlanSet, type PlanStep, planSetSchema } from "./plan.ts";
import { afterKnown, planFacts } from "./plan-facts.ts";
import { firstPlans } from "./start.ts";
import { formatHours, waitingFigure } from "./words.ts";

const set = () =>
  firstPlans(
    [
      { id: "a", name: "A" },
      { id: "b", name: "B" },
    ],
    { sift: null, temperatureK: 298.15, n: 6 },
  );
const NEXT: PlanStep = {
  level: null,
  name: "next level",
  cut: { by: "share", share: 0.95 },
  hours: {
    from: "scaled",
    timings: [
      { atoms: 10, hours: 1 },
      { atoms: 20, hours: 8 },
    ],
    exponent: 3,
  },
  sigma: 0.3,
};

describe("energies that are known", () => {
  it("are counted as if they were computed anew, in every plan, and only where somebody asks", () => {
    const known = firstPlans(
      [
        { id: "a", name: "MMFF94" },
        { id: "b", name: "B3LYP/6-31G(d)" },
      ],
      { sift: null, temperatureK: 298.15, n: 6 },
    );
    const hours = ({ plans }: PlanSet) => plans.map(({ plan }) => plan.steps[0]!.hours);
    expect(hours(known)).toEqual(Array(4).fill({ from: "known" }));
    const anew = computedAnew(known);
    expect(hours(anew)).toEqual(Array(4).fill({ from: "rule", rule: "dft-optimise" }));
    expect(cutsOf(anew)).toEqual(cutsOf(known));
    expect(computedAnew(anew)).toEqual(anew);
  });
});

const cutsOf = ({ plans }: PlanSet) => plans.map(({ plan }) => plan.steps.map(({ cut }) => cut));
/** What all plans must have in common. */
const chainsOf = ({ plans }: PlanSet) =>
  new Set(
    plans.map(({ plan }) => JSON.stringify({ ...plan, steps: plan.steps.map((s) => ({ ...s, cut: 0 })) })),
  );
const share = (share: number) => ({ by: "share", share });

describe("plans side by side", () => {
  it("all get a step that is added, each with the share that it keeps", () => {
    const two = withStep(set(), 1, NEXT);
    expect(planSetSchema.parse(two)).toEqual(two);
    expect(chainsOf(two).size).toBe(1);
    expect(cutsOf(two)).toEqual([
      [share(0.9), share(0.9)],
      [share(0.95), share(0.95)],
      [share(0.99), share(0.99)],
      [{ by: "all" }, { by: "all" }],
    ]);
  });

  it("then keep and cost more from one to the next, at the same last level", () => {
    const two = withStep(set(), 1, NEXT);
    const outcomes = two.plans.map(({ plan }) =>
      evaluatePlan(plan, {
        start: [0.3, 0, 1.4, 1.1, 2.9, 2.5],
        known: [[0, 0.4, 0.9, 1.5, 2.2, 3], null],
        weights: new Float64Array(6).fill(1),
        atoms: 20,
      }),
    );
    const marginal = marginalOf(two, outcomes);
    expect(orderOf(outcomes)).toEqual([0, 1, 2, 3]);
    expect(outcomes[3]!.kept.mean).toBeCloseTo(1, 9);
    expect(outcomes[3]!.cost).toBeCloseTo(6 * 8 * 1.04, 9);
    for (let k = 1; k < 4; k++) {
      expect(outcomes[k]!.kept.mean).toBeGreaterThanOrEqual(outcomes[k - 1]!.kept.mean);
      expect(outcomes[k]!.cost).toBeGreaterThanOrEqual(outcomes[k - 1]!.cost);
      expect(marginal[k] ?? 0).toBeGreaterThanOrEqual(0);
    }
    const csv = alternativesCsv(two, outcomes);
    expect(csv).not.toMatch(/,-/);
    for (const row of csv.trim().split("\r\n").slice(1)) expect(row).toContain(",next level,");
  });

  it("follow the plan at hand in everything but their cuts", () => {
    const start = set();
    const own = start.plans[1]!.plan;
    const moved = withChosen(start, {
      ...own,
      temperatureK: 350,
      slots: 2,
      steps: [{ ...own.steps[0]!, hours: NEXT.hours, cut: { by: "window", kcal: 2 } }],
    });
    expect(chainsOf(moved).size).toBe(1);
    expect(moved.plans.map(({ plan }) => plan.temperatureK)).toEqual([350, 350, 350, 350]);
    expect(cutsOf(moved)).toEqual([
      [share(0.9)],
      [{ by: "window", kcal: 2 }],
      [share(0.99)],
      [{ by: "all" }],
    ]);
  });

  it("lose a step together, and have it back with their own cuts, whichever is at hand by then", () => {
    const two = withStep(set(), 1, NEXT);
    const cuts = new Map(two.plans.map(({ name, plan }) => [name, plan.steps[0]!.cut]));
    const one = withoutStep(two, 0);
    expect(one.plans.map(({ plan }) => plan.steps.map(({ name }) => name))).toEqual(
      two.plans.map(() => ["next level"]),
    );
    expect(withStep({ ...one, chosen: 3 }, 0, two.plans[1]!.plan.steps[0]!, cuts)).toEqual({
      ...two,
      chosen: 3,
    });
  });

  it("that were stored with fewer steps go all the way", () => {
    const start = set();
    const own = start.plans[1]!.plan;
    const uneven: PlanSet = {
      ...start,
      plans: start.plans.with(1, { name: "Middle", plan: { ...own, steps: [...own.steps, NEXT] } }),
    };
    expect(chainsOf(uneven).size).toBe(2);
    expect(alignPlans(uneven)).toEqual(withStep(start, 1, NEXT));
    expect(alignPlans({ ...start, chosen: 9 }).chosen).toBe(0);
  });

  it("carry a window on to no other level", () => {
    const own = set().plans[0]!.plan;
    const window = { ...own, steps: [{ ...own.steps[0]!, cut: { by: "window" as const, kcal: 2 } }] };
    expect(carriedOn(window, { by: "all" })).toEqual({ by: "all" });
    expect(carriedOn(own, { by: "all" })).toEqual(share(0.9));
  });
});

describe("what each further percent costs", () => {
  it("is absent where a plan keeps as much as the one before, or costs less", () => {
    const plans = [
      { kept: 1, cost: 90 },
      { kept: 1 - 1e-13, cost: 95 },
      { kept: 0.9, cost: 60 },
      { kept: 0.92, cost: 40 },
      { kept: 0.97, cost: 40 },
    ];
    expect(keptOrder(plans)).toEqual([2, 3, 4, 0, 1]);
    expect(marginalCosts(plans)).toEqual([expect.closeTo(50 / 3, 9), null, null, null, 0]);
  });
});

describe("what a figure of a plan belongs to", () => {
  it("names the last level, the errors that count, the draws and the seed, each once", () => {
    const { plan } = withStep(set(), 1, NEXT).plans[1]!;
    const recipe = { draws: 500, seed: 412, generator: "g" };
    const facts = planFacts(plan, "A", recipe, afterKnown(plan));
    expect(facts.map(({ name, value }) => [name, value])).toEqual([
      ["reference", "next level"],
      ["error of step 2, B to next level", 0.3],
      ["error of next level", 0.3],
      ["draws", 500],
      ["generator", "g"],
      ["seed", 412],
    ]);
    const before = { ...plan, steps: [NEXT, plan.steps[0]!] };
    expect(planFacts(before, "A", recipe)[1]!.name).toBe("error of step 1, A to next level");
    expect(planFacts(before, "A", recipe, afterKnown(before))).toHaveLength(5);
  });
});

describe("hours in words", () => {
  it("have a minus and no exponent", () => {
    expect(formatHours(-29)).toBe("\u221229");
    expect(formatHours(5e-7)).toBe("0.0000005");
  });

  it("are not known where a step's are not", () => {
    const { plan } = withStep(set(), 1, { ...NEXT, hours: { from: "unknown" } }).plans[1]!;
    const outcome = (wall: number) => ({ wall }) as Parameters<typeof waitingFigure>[1];
    expect(waitingFigure(plan, outcome(0))).toBe("not known");
    expect(waitingFigure(plan, outcome(3))).toBe("at least 3.00");
    expect(waitingFigure(set().plans[1]!.plan, outcome(0))).toBe("0");
  });
});
