import { and, asc, eq, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembleFiles, frames as frameRows } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import type { EnsembleAnswer } from "../../lib/api/schemas.ts";
import type { IntakeMessage, IntakeQuestion } from "../../lib/intake/report.ts";
import { frameStrip } from "./accepted-frames.server.ts";
import { findColumns, toLevels } from "./find-columns.server.ts";
import { findEnsembleRow, findFiles } from "./load-ensemble.server.ts";
import { findMessages, findQuestions } from "./load-intake.server.ts";

/** Address of an ensemble's page. */
export function ensembleUrl(ensembleId: string): string {
  return `${env().APP_ORIGIN}/ensembles/${ensembleId}`;
}

/**
 * Questions still open. A level may have any name, so its options are proposals and may be none: a program is told what
 * to send, where a page shows a field.
 */
function open(questions: readonly IntakeQuestion[]): EnsembleAnswer["intake"]["questions"] {
  return questions
    .filter((question) => question.answered === undefined)
    .map((question) =>
      question.id === "level"
        ? { ...question, text: `${question.text} Any name will do: send it as the option.` }
        : question,
    );
}

/** Of a file in an archive its own name. */
const fileName = sql<string>`coalesce(${ensembleFiles.entry}, ${ensembleFiles.name})`;

/** What people hold is said like what the readers hold, with the reason they gave; the first 100 as everywhere. */
async function handHolds(ensembleId: string): Promise<IntakeMessage[]> {
  const rows = await db
    .select({ frame: frameRows.number, line: frameRows.line, note: frameRows.note, file: fileName })
    .from(frameRows)
    .innerJoin(
      ensembleFiles,
      and(eq(ensembleFiles.ensembleId, frameRows.ensembleId), eq(ensembleFiles.position, frameRows.file)),
    )
    .where(and(eq(frameRows.ensembleId, ensembleId), eq(frameRows.holdReason, "by-hand")))
    .orderBy(asc(frameRows.number))
    .limit(100);
  return rows.map(({ frame, line, note, file }) => ({
    code: "by-hand",
    severity: "hold",
    file,
    line,
    frame,
    message: note ?? "Held by hand.",
  }));
}

/** The intake report as the API gives it; access has been decided before. */
export async function describeIntake(teamId: string, ensembleId: string): Promise<EnsembleAnswer["intake"]> {
  const { ensemble } = await findEnsembleRow(teamId, ensembleId);
  const [messages, byHand, questions] = await Promise.all([
    findMessages(ensembleId),
    handHolds(ensembleId),
    findQuestions(ensembleId),
  ]);
  const { frames, accepted, remarked, held } = ensemble;
  return { frames, accepted, remarked, held, messages: [...messages, ...byHand], questions: open(questions) };
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
    columns: found.map(({ id, name, kind, unit, rule, count, missing }) => ({
      id,
      name,
      kind,
      unit,
      rule: kind === "property" ? (rule ?? "linear") : null,
      count,
      missing,
    })),
    files: files.map(({ name, sha256, bytes, frames, batch }) => ({ name, sha256, bytes, frames, batch })),
    createdAt: ensemble.createdAt.toISOString(),
  };
}
