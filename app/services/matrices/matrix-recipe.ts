import { z } from "zod";

/** As stored with a matrix; frame numbers stand beside it. */
export const matrixRecipeSchema = z.strictObject({
  version: z.literal(1),
  atoms: z.enum(["heavy", "heavy+polarH", "all"]),
  symmetry: z.boolean(),
  /** The smaller of proper and mirror RMSD. */
  mirror: z.boolean(),
});

export const matrixNumbersSchema = z.array(z.number().int().positive());

/** Frames of one matrix: 12.5 million pairs, 50 MB. */
export const MOST_FRAMES = 5000;
