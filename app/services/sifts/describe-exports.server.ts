import { createHash } from "node:crypto";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { type ExportFormat, openExport } from "./export-sift.server.ts";
import { findSift } from "./find-sift.server.ts";

/** Larger sets are not written four times only to be measured. */
const MOST_CONFORMERS = 2_000;
const FORMATS: readonly ExportFormat[] = ["csv", "xyz", "sdf", "json"];

export interface ExportFacts {
  format: ExportFormat;
  bytes: number;
  sha256: string;
}

/**
 * Size and checksum of each file of a distinct set as it would be sent now.
 *
 * @param options.temperature K, for the populations that go along
 * @returns null for an unfinished sift, one whose data were read again since, and a set too large to be written for this alone
 */
export async function describeExports(options: {
  actor: Actor;
  siftId: string;
  temperature?: number;
}): Promise<ExportFacts[] | null> {
  const grant = await accessSift(options.actor, "read", options.siftId);
  const sift = await findSift(grant.siftId);
  if (sift.status !== "done" || (sift.keptCount ?? Number.POSITIVE_INFINITY) > MOST_CONFORMERS) return null;
  const facts: ExportFacts[] = [];
  for (const format of FORMATS) {
    const file = await openExport(grant, sift, format, options.temperature).catch((error: unknown) => {
      if (error instanceof DomainError && error.code === "conflict") return null;
      throw error;
    });
    if (file === null) return null;
    const { pieces } = file;
    const hash = createHash("sha256");
    let bytes = 0;
    for (const piece of pieces) {
      hash.update(piece);
      bytes += Buffer.byteLength(piece);
    }
    facts.push({ format, bytes, sha256: hash.digest("hex") });
  }
  return facts;
}
