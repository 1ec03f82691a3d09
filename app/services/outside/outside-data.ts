import { z } from "zod";

/** What a row of `outside_structures` holds beside its name: plain numbers, so that a browser computes from it. */
export const outsideDataSchema = z.object({
  elements: z.array(z.number().int()),
  /** Flat x, y, z in Å, in the order of its file. */
  positions: z.array(z.number()),
  /** Flat pairs from 0. */
  bonds: z.array(z.number().int()),
  /** Atom of the structure for each atom of the ensemble, -1 where it shows none. */
  map: z.array(z.number().int()),
  atoms: z.enum(["heavy", "heavy+polarH", "all"]),
  remarks: z.array(z.string()),
  /** At a level of the ensemble, in that level's unit; `from` says where it was read, or "typed". */
  energy: z.object({ levelId: z.string(), value: z.number(), from: z.string() }).nullable(),
});

export type OutsideData = z.infer<typeof outsideDataSchema>;
