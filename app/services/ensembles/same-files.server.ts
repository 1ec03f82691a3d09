import { createHash } from "node:crypto";
import { and, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembles, series } from "../../db/schema.server.ts";
import type { UploadFields, Warnings } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Grant } from "../auth/access.server.ts";
import type { WrittenAnswers } from "./complete-reading.server.ts";
import { ensembleUrl } from "./describe-ensemble.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { answersSoFar } from "./settle-answers.server.ts";

/** The checksum that stands for the files of an upload in their order. */
export function filesSha(shas: readonly Buffer[]): Buffer {
  const hash = createHash("sha256");
  for (const sha of shas) hash.update(sha);
  return hash.digest();
}

type KnownEnsemble = Pick<
  typeof ensembles.$inferSelect,
  "id" | "name" | "answers" | "createdByToken" | "seriesId"
>;

/** The living ensemble that the same files made in this team. */
export async function findSameFiles(teamId: string, sha: Buffer): Promise<KnownEnsemble | null> {
  const rows = await db
    .select({
      id: ensembles.id,
      name: ensembles.name,
      answers: ensembles.answers,
      createdByToken: ensembles.createdByToken,
      seriesId: ensembles.seriesId,
    })
    .from(ensembles)
    .where(and(eq(ensembles.teamId, teamId), eq(ensembles.filesSha, sha), isNull(ensembles.deletedAt)))
    .limit(1);
  return rows[0] ?? null;
}

const COUNTED = ["energyUnit", "energyFrom", "level"] as const;

/** A token narrowed to adding reads nothing of what others took in, its address included. */
function refuseForeign(known: KnownEnsemble, grant: Grant): void {
  if (grant.onlyOwnOfToken === null || known.createdByToken === grant.onlyOwnOfToken) return;
  throw new DomainError(
    "conflict",
    "Already here",
    "Another token or person took these files into the team before; this token sees only what it took in itself, so it is not told where they are.",
  );
}

function otherAnswers(
  known: KnownEnsemble,
  answers: WrittenAnswers,
  differs: readonly Counted[],
): DomainError {
  const url = ensembleUrl(known.id);
  const faults = differs.map((field) => ({
    field,
    message: `${known.answers[field] ?? "left open"} when they were taken in, ${answers[field] ?? "left open"} now.`,
  }));
  return new DomainError(
    "conflict",
    "The same files with other answers",
    `These files are here already, at ${url}, with other answers. To read them again with new ones, send these to /api/v1/ensembles/${known.id}/reread.`,
    { faults, extra: { existing: known.id, url } },
  );
}

type Counted = (typeof COUNTED)[number];

/** What the request said beside the answers that count, and the ensemble keeps as it is. */
async function keptAsItIs(known: KnownEnsemble, fields: UploadFields): Promise<Warnings> {
  const { energyKind, energyTemperature } = known.answers;
  const anew = `To change it, send all answers to /api/v1/ensembles/${known.id}/reread.`;
  const kept: string[] = [];
  if (fields.energyKind !== undefined && fields.energyKind !== energyKind) {
    kept.push(`energyKind=${fields.energyKind} was not taken up: its energies stay ${energyKind}. ${anew}`);
  }
  if (fields.energyTemperature !== undefined && fields.energyTemperature !== energyTemperature) {
    const own =
      energyTemperature === null ? "stays without a temperature" : `stays at ${energyTemperature} K`;
    kept.push(`energyTemperature=${fields.energyTemperature} was not taken up: it ${own}. ${anew}`);
  }
  if (fields.name !== undefined && fields.name !== known.name) {
    kept.push(`The name was not taken up: it stays "${known.name}".`);
  }
  const asked = fields.series;
  if (asked !== undefined) {
    const [own] = await db
      .select({ name: series.name })
      .from(series)
      .where(eq(series.id, known.seriesId ?? ""));
    if (own && own.name !== asked) kept.push(`The series was not taken up: it stays in "${own.name}".`);
  }
  return kept.map((message) => ({
    code: "kept",
    message: `These files are here already as this ensemble. ${message}`,
  }));
}

/** The same ensemble, and what of the request it did not take up. */
export interface KnownFiles {
  ensembleId: string;
  warnings: Warnings;
}

/**
 * What the same files mean when they come again: the same ensemble where the answers are the same, else a conflict with
 * its address. Answers are the same as they were written with the files, or as they are in force now that questions of
 * intake were answered: a job that is run again with either finds what it made.
 *
 * @param options.interactive a person who says nothing of unit, number and level means the ensemble as it is
 */
export async function answerSameFiles(
  known: KnownEnsemble,
  answers: WrittenAnswers,
  options: { grant: Grant; interactive: boolean; fields: UploadFields },
): Promise<KnownFiles> {
  refuseForeign(known, options.grant);
  const inForce = answersSoFar(known, await findQuestions(known.id));
  const differs = COUNTED.filter((field) => {
    const said = answers[field];
    if (options.interactive && said === null) return false;
    return said !== known.answers[field] && said !== inForce[field];
  });
  if (differs.length > 0) throw otherAnswers(known, answers, differs);
  return { ensembleId: known.id, warnings: await keptAsItIs(known, options.fields) };
}
