import type { z } from "zod";
import type { Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { jobs } from "../../db/schema.server.ts";

interface JobDefinition<Payload extends z.ZodType> {
  readonly name: string;
  readonly version: number;
  readonly payload: Payload;
}

/**
 * Writes a job into the queue, in the transaction of what asked for it. Call `wakeJobs()` once that is in.
 *
 * @returns id of the job
 */
export async function enqueueJob<Payload extends z.ZodType>(
  tx: Queryable,
  definition: JobDefinition<Payload>,
  job: { payload: z.infer<Payload>; teamId: string; userId: string | null; now?: Date },
): Promise<string> {
  const id = newId();
  await tx.insert(jobs).values({
    id,
    definition: definition.name,
    version: definition.version,
    teamId: job.teamId,
    userId: job.userId,
    payload: definition.payload.parse(job.payload),
    state: "queued",
    createdAt: job.now ?? new Date(),
  });
  return id;
}
