import { z } from "zod";

/** Computes one row of `pair_matrices`. Running it twice gives the same bytes. */
export const matrixJob = {
  name: "matrix",
  version: 1,
  payload: z.strictObject({ matrixId: z.string() }),
} as const;
