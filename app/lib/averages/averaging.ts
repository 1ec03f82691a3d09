import { z } from "zod";

/**
 * What people said of averages and what is kept with the ensemble: groups of equivalent atoms taken apart by hand, and
 * measured values. Atoms count from 1 here, as in everything that is stored.
 */

const atom = z.number().int().min(1);
/** Who said it (an id, null where the person is not known) and when. */
const said = { by: z.string().nullable(), at: z.string() };

/** Equivalent atoms that give a signal a part: a rotor that turns more slowly than the experiment looks. */
export const atomSplitSchema = z.object({ parts: z.array(z.array(atom).min(1)).min(2), ...said });

/** Measured values of one per-atom quantity, as they were entered. */
export const measuredRecordSchema = z.object({
  quantity: z.string(),
  /** What was said of the computed numbers; null leaves it to their name. */
  are: z.enum(["shieldings", "shifts"]).nullable(),
  /** First atom of the group and its value, by rising atom. */
  values: z.array(z.tuple([atom, z.number()])),
  /** All atoms that each value was measured for, by the first; absent in records of before this was kept. */
  of: z.array(z.tuple([atom, z.array(atom).min(1)])).optional(),
  /** Values measured for atoms that give no signal of their own now; they take no part. */
  aside: z.array(z.object({ atoms: z.array(atom).min(1), value: z.number() })).optional(),
  /** Slope and intercept typed in, by atomic number. */
  scaling: z.array(z.object({ z: z.number().int(), slope: z.number(), intercept: z.number() })),
  /** First atoms of the pairs whose two values were exchanged. */
  swapped: z.array(atom),
});
export type MeasuredRecord = z.infer<typeof measuredRecordSchema>;

/** Measured values of properties of the whole molecule: name of the column and value, by name. */
export const measuredPropertiesSchema = z.object({
  values: z.array(z.tuple([z.string().min(1).max(120), z.number()])),
});
export type MeasuredProperties = z.infer<typeof measuredPropertiesSchema>;

export const averagingSchema = z.object({
  splits: z.array(atomSplitSchema).default([]),
  measured: z.array(measuredRecordSchema.extend(said)).default([]),
  properties: measuredPropertiesSchema.extend(said).nullable().default(null),
});
export type Averaging = z.infer<typeof averagingSchema>;

export const NOTHING_SAID: Averaging = { splits: [], measured: [], properties: null };
