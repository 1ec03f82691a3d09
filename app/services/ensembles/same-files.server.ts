import { createHash } from "node:crypto";
import { and, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembles } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Grant } from "../auth/access.server.ts";
import type { WrittenAnswers } from "./complete-reading.server.ts";
import { ensembleUrl } from "./describe-ensemble.server.ts";

/** The checksum that stands for the files of an upload in their order. */
export function filesSha(shas: readonly Buffer[]): Buffer {
  const hash = createHash("sha256");
  for (const sha of shas) hash.update(sha);
  return hash.digest();
}

interface KnownEnsemble {
  id: string;
  answers: WrittenAnswers;
  createdByToken: string | null;
}

/** The living ensemble that the same files made in this team. */
export async function findSameFiles(teamId: string, sha: Buffer): Promise<KnownEnsemble | null> {
  const rows = await db
    .select({
      id: ensembles.id,
      answers: ensembles.answers,
      createdByToken: ensembles.createdByToken,
    })
    .from(ensembles)
    .where(and(eq(ensembles.teamId, teamId), eq(ensembles.filesSha, sha), isNull(ensembles.deletedAt)))
    .limit(1);
  return rows[0] ?? null;
}

const COUNTED = ["energyUnit", "energyFrom", "level"] as const;

/**
 * What the same files mean when they come again: the same ensemble where the answers are the same as written, else a
 * conflict with its address.
 *
 * @param options.interactive a person who says nothing of unit, number and level means the ensemble as it is
 */
export function answerSameFiles(
  known: KnownEnsemble,
  answers: WrittenAnswers,
  options: { grant: Grant; interactive: boolean },
): string {
  if (options.grant.onlyOwnOfToken !== null && known.createdByToken !== options.grant.onlyOwnOfToken) {
    throw new DomainError(
      "conflict",
      "Already here",
      "Somebody else took these files into the team before; this token sees only what it took in itself.",
    );
  }
  const differs = COUNTED.filter(
    (field) => answers[field] !== known.answers[field] && !(options.interactive && answers[field] === null),
  );
  if (differs.length === 0) return known.id;
  const url = ensembleUrl(known.id);
  const faults = differs.map((field) => ({
    field,
    message: `${known.answers[field] ?? "left open"} when they were taken in, ${answers[field] ?? "left open"} now.`,
  }));
  throw new DomainError(
    "conflict",
    "The same files with other answers",
    `These files are here already, at ${url}, with other answers. To read them again with new ones, send these to /api/v1/ensembles/${known.id}/reread.`,
    { faults, extra: { existing: known.id, url } },
  );
}
