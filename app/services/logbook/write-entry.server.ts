import type { Queryable } from "../../db/client.server.ts";
import { logbook } from "../../db/schema.server.ts";
import type { LogbookEntry } from "../../lib/logbook/entries.ts";

/** Who acted; the product itself where both ids are null. */
export interface Doer {
  userId: string | null;
  tokenId: string | null;
  /** Address of the caller, as the trusted proxy setting gives it. */
  origin?: string | null;
}

/**
 * Adds an entry to the logbook, in the transaction of the act itself: no act without its entry, no entry without its act.
 */
export async function writeEntry(
  tx: Queryable,
  at: { teamId: string | null; ensembleId?: string | null },
  by: Doer,
  entry: LogbookEntry,
): Promise<void> {
  await tx.insert(logbook).values({
    teamId: at.teamId,
    ensembleId: at.ensembleId ?? null,
    userId: by.userId,
    tokenId: by.tokenId,
    type: entry.type,
    data: entry.data,
    origin: by.origin ?? null,
    createdAt: new Date(),
  });
}
