import { z } from "zod";

/** Computes one row of `sifts`. Running it twice gives the same result. */
export const siftJob = {
  name: "sift",
  version: 1,
  payload: z.strictObject({ siftId: z.string() }),
} as const;
