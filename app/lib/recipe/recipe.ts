import { z } from "zod";

/** Starting values of the product's own choice (methods page, section 6), not published thresholds. */
export const DEFAULT_ENERGY_TOLERANCE_KCAL = 0.15;
export const DEFAULT_RMSD_TOLERANCE = 0.2;
/** Å; above it conformers that nobody would call one shape merge (common practice, no source). */
export const WIDE_RMSD_TOLERANCE = 2;

/** 0 keeps the lowest frame and those equal to it. */
const window = z.number().finite().nonnegative();

/** What a caller may ask of a sift; everything but `level` may be left out. Unknown fields are refused. */
export const siftRequestSchema = z
  .strictObject({
    /** Id or name of the level whose energies order the frames; null sifts in file order. */
    level: z.string().min(1).max(200).nullable(),
    /** kcal/mol above the lowest accepted frame; null or absent means no window. */
    window: window.nullable().optional(),
    /** kcal/mol; null means none: RMSD alone decides. */
    energyTolerance: z.number().finite().nonnegative().nullable().optional(),
    /** Å. */
    rmsdTolerance: z.number().finite().nonnegative().max(100).optional(),
    atoms: z.enum(["heavy", "heavy+polarH", "all"]).optional(),
    symmetry: z.boolean().optional(),
    mirror: z.enum(["auto", "merge", "keep"]).optional(),
    chirality: z.enum(["auto", "achiral", "chiral"]).optional(),
  })
  .meta({ id: "SiftRequest" });
export type SiftRequest = z.infer<typeof siftRequestSchema>;

/** A recipe with every default and `auto` resolved: what is stored, returned, and hashed. Key order is fixed. */
export const siftRecipeSchema = z
  .strictObject({
    version: z.literal(1),
    /** Id of the level, or null. */
    level: z.string().nullable(),
    levelName: z.string().nullable(),
    window: window.nullable(),
    energyTolerance: z.number().nonnegative().nullable(),
    rmsdTolerance: z.number().nonnegative(),
    atoms: z.enum(["heavy", "heavy+polarH", "all"]),
    symmetry: z.boolean(),
    mirror: z.enum(["merge", "keep"]),
    chirality: z.enum(["achiral", "chiral"]),
    /** True where the request overrode what the parity test found. */
    chiralityOverridden: z.boolean(),
  })
  .meta({ id: "SiftRecipe" });
export type SiftRecipe = z.infer<typeof siftRecipeSchema>;
