import { z } from "zod";

/** Longest chain of levels, and most plans side by side. */
export const MAX_STEPS = 4;
export const MAX_ALTERNATIVES = 4;

const hours = z.number().positive().max(1e6);
const atoms = z.number().int().min(1).max(100_000);

/** Where the core hours of one structure come from. */
export const hoursSchema = z.discriminatedUnion("from", [
  z.object({ from: z.literal("typed"), hours }),
  /** Finished structures of this molecule: their mean counts. */
  z.object({ from: z.literal("timings"), hours: z.array(hours).min(1).max(50) }),
  /** Timings of molecules of other sizes: t = t0 (N/N0)^alpha, alpha fitted where there are two sizes. */
  z.object({
    from: z.literal("scaled"),
    timings: z.array(z.object({ atoms, hours })).min(1).max(20),
    /** For timings of one size. */
    exponent: z.number().min(0).max(10),
  }),
  /** A rule of thumb by its name in `RULES`. */
  z.object({ from: z.literal("rule"), rule: z.string().max(40) }),
  /** The energies are there: nothing is left to compute. */
  z.object({ from: z.literal("known") }),
  /** Nobody has said: the cost leaves the step out, and says so. */
  z.object({ from: z.literal("unknown") }),
]);
export type HoursSource = z.infer<typeof hoursSchema>;

/** Which conformers go on: a window in kcal/mol above the lowest, a share of the final population, or all. */
export const cutSchema = z.discriminatedUnion("by", [
  z.object({ by: z.literal("window"), kcal: z.number().min(0).max(1000) }),
  z.object({ by: z.literal("share"), share: z.number().gt(0).max(1) }),
  z.object({ by: z.literal("all") }),
]);
export type Cut = z.infer<typeof cutSchema>;

export const stepSchema = z.object({
  /** Energy column of the level where there is one: its energies are then known. null: predicted. */
  level: z.string().max(16).nullable(),
  name: z.string().trim().min(1).max(120),
  /** Of the level before it: who is computed at this one. */
  cut: cutSchema,
  hours: hoursSchema,
  /** Error between this level and the one before, kcal/mol a conformer: counts where the energies are predicted. */
  sigma: z.number().min(0).max(20),
});
export type PlanStep = z.infer<typeof stepSchema>;

/** A chain of levels in order of work, and what it costs. */
export const planSchema = z.object({
  version: z.literal(1),
  /** Energy column whose energies order the conformers at the start. */
  start: z.string().max(16),
  steps: z.array(stepSchema).min(1).max(MAX_STEPS),
  temperatureK: z.number().positive().max(100_000),
  /** Error of the last level against the truth, kcal/mol a conformer. */
  truthSigma: z.number().min(0).max(20),
  /** Share of the jobs that have to be repeated. */
  failRate: z.number().min(0).max(10),
  /** Jobs that run at the same time, and cores that each has. */
  slots: z.number().int().min(1).max(100_000),
  coresPerSlot: z.number().int().min(1).max(10_000),
  draws: z.number().int().min(2).max(100_000),
  seed: z.number().int().min(0).max(0xffff_ffff),
});
export type Plan = z.infer<typeof planSchema>;

/** What is stored under one name: the plan at hand and those beside it. */
export const planSetSchema = z.object({
  version: z.literal(1),
  /** Sift whose conformers are carried; null: all accepted frames. */
  sift: z.string().max(16).nullable(),
  chosen: z.number().int().min(0),
  plans: z
    .array(z.object({ name: z.string().trim().min(1).max(40), plan: planSchema }))
    .min(1)
    .max(MAX_ALTERNATIVES),
});
export type PlanSet = z.infer<typeof planSetSchema>;
