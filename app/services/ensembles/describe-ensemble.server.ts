import { env } from "../../env.server.ts";
import type { EnsembleAnswer } from "../../lib/api/schemas.ts";
import type { IntakeQuestion } from "../../lib/intake/report.ts";
import { frameStrip } from "./accepted-frames.server.ts";
import { findColumns, toLevels } from "./find-columns.server.ts";
import { findEnsembleRow, findFiles } from "./load-ensemble.server.ts";
import { findMessages, findQuestions } from "./load-intake.server.ts";

/** Address of an ensemble's page. */
export function ensembleUrl(ensembleId: string): string {
  return `${env().APP_ORIGIN}/ensembles/${ensembleId}`;
}

function open(questions: readonly IntakeQuestion[]): EnsembleAnswer["intake"]["questions"] {
  return questions.filter((question) => question.answered === undefined);
}

/** The intake report as the API gives it; access has been decided before. */
export async function describeIntake(teamId: string, ensembleId: string): Promise<EnsembleAnswer["intake"]> {
  const { ensemble } = await findEnsembleRow(teamId, ensembleId);
  const [messages, questions] = await Promise.all([findMessages(ensembleId), findQuestions(ensembleId)]);
  const { frames, accepted, remarked, held } = ensemble;
  return { frames, accepted, remarked, held, messages, questions: open(questions) };
}

/** An ensemble as the API gives it; access has been decided before. */
export async function describeEnsemble(teamId: string, ensembleId: string): Promise<EnsembleAnswer> {
  const { ensemble, series } = await findEnsembleRow(teamId, ensembleId);
  const [strip, files, intake] = await Promise.all([
    frameStrip(ensembleId),
    findFiles(ensembleId),
    describeIntake(teamId, ensembleId),
  ]);
  const found = await findColumns(ensembleId, strip);
  return {
    id: ensemble.id,
    url: ensembleUrl(ensemble.id),
    name: ensemble.name,
    series,
    formula: ensemble.formula,
    atoms: ensemble.atoms,
    chirality: ensemble.chirality,
    intake,
    levels: toLevels(found).map(({ ordinal: _, ...level }) => level),
    columns: found.map(({ id, name, kind, unit, count, missing }) => ({
      id,
      name,
      kind,
      unit,
      count,
      missing,
    })),
    files: files.map(({ name, sha256, bytes, frames }) => ({ name, sha256, bytes, frames })),
    createdAt: ensemble.createdAt.toISOString(),
  };
}
