import type { Transaction } from "../../db/client.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Grant } from "../auth/access.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

/** Measured values that cannot be kept, in words. */
export function refused(message: string): DomainError {
  return new DomainError("invalid", "The measured values were not kept", message, {
    faults: [{ field: "record", message }],
  });
}

/** What a form sent as JSON; null, which no schema takes, where it is none. */
export function jsonSent(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return null;
  }
}

/**
 * What was said of averages has to be what the page was opened with.
 *
 * @throws DomainError conflict where somebody changed it meanwhile
 */
export function assertUnchanged(version: number, opened: number): void {
  if (version === opened) return;
  const message =
    "Somebody changed groups or measured values since this page was opened. Load it again: your values stay in its address.";
  throw new DomainError("conflict", "Changed meanwhile", message);
}

/** One thing said before and after; null where it was or is not. */
export interface SaidChange {
  what: string;
  before: string | null;
  after: string | null;
}

/** What differs between two lists of things said, each in words. */
export function changesOf(
  before: ReadonlyMap<string, string>,
  after: ReadonlyMap<string, string>,
): SaidChange[] {
  return [...new Set([...before.keys(), ...after.keys()])]
    .map((what) => ({ what, before: before.get(what) ?? null, after: after.get(what) ?? null }))
    .filter((change) => change.before !== change.after);
}

const MOST_TOLD = 40;

/** The logbook's entry, value by value. */
export async function tellMeasured(
  tx: Transaction,
  grant: Grant & { ensembleId: string },
  told: { quantity: string; unit: string | null; count: number; changes: readonly SaidChange[] },
): Promise<void> {
  await writeEntry(tx, grant, grant, {
    type: "measured-kept",
    data: {
      ...told,
      changes: told.changes.slice(0, MOST_TOLD),
      more: Math.max(0, told.changes.length - MOST_TOLD),
    },
  });
}
