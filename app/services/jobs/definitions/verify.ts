import { z } from "zod";

/** Recomputes one edition and keeps how it came out. Running it twice keeps two outcomes that say the same. */
export const verifyJob = {
  name: "verify",
  version: 1,
  payload: z.strictObject({ editionId: z.string(), userId: z.string().nullable() }),
} as const;
