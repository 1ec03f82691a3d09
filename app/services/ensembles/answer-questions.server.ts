import { and, eq, isNull } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { ensembles, questions as questionTable } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import type { IntakeQuestion } from "../../lib/intake/report.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { acceptedSha } from "./accepted-frames.server.ts";
import { answerReading, type ReadingAnswer } from "./answer-reading.server.ts";
import { countFrames } from "./intake-rows.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { type EnsembleRow, settleAnswers } from "./settle-answers.server.ts";
import { siftAfterIntake } from "./sift-after-intake.server.ts";

export interface Answer {
  id: string;
  option: string;
}

type At = Grant & { ensembleId: string };

function invalid(message: string): DomainError {
  return new DomainError("invalid", "This is no answer", message, {
    faults: [{ field: "answers", message }],
  });
}

async function lockEnsemble(tx: Transaction, at: At): Promise<EnsembleRow> {
  const rows = await tx
    .select()
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)))
    .for("update");
  const row = rows[0];
  if (row === undefined) throw notFound();
  return row;
}

const MAX_LEVEL = 120;

/** The option as it is kept; a level may have any name. */
function checkOption(question: IntakeQuestion, option: string): string {
  if (question.options.some(({ id }) => id === option)) return option;
  const name = option.trim();
  if (question.id === "level" && name !== "" && name.length <= MAX_LEVEL) return name;
  if (question.id === "level") throw invalid(`The name of a level has 1 to ${MAX_LEVEL} characters.`);
  const there = question.options.map(({ id }) => `"${id}"`).join(", ");
  throw invalid(`"${option}" is no option of the question "${question.id}". Options: ${there}.`);
}

async function record(
  tx: Transaction,
  at: At,
  question: IntakeQuestion,
  option: string,
  released: number,
): Promise<void> {
  await writeEntry(tx, at, at, {
    type: "answer",
    data: {
      question: question.id,
      text: question.text,
      option,
      optionText: question.options.find(({ id }) => id === option)?.text ?? option,
      released,
    },
  });
}

async function markAnswered(
  tx: Transaction,
  at: At,
  question: IntakeQuestion,
  option: string,
): Promise<void> {
  await tx
    .update(questionTable)
    .set({ answered: option, answeredBy: at.userId, answeredAt: new Date() })
    .where(and(eq(questionTable.ensembleId, at.ensembleId), eq(questionTable.id, question.id)));
}

async function refresh(tx: Transaction, at: At, ensemble: EnsembleRow): Promise<void> {
  const open = (await findQuestions(at.ensembleId, tx)).filter(({ answered }) => answered === undefined);
  await tx
    .update(ensembles)
    .set({
      ...(await countFrames(tx, at.ensembleId)),
      openQuestions: open.length,
      acceptedSha: await acceptedSha(tx, at.ensembleId),
      version: ensemble.version + 1,
      changedAt: new Date(),
    })
    .where(eq(ensembles.id, at.ensembleId));
}

function answeredBefore(question: IntakeQuestion, at: At): DomainError {
  const how =
    readAskId(question.id) === null
      ? "Read the files again to answer it anew"
      : "To answer it anew, read the files again with it among the answers";
  return new DomainError(
    "conflict",
    "Answered before",
    `"${question.text}" was answered "${question.answered}" before. ${how} (POST /api/v1/ensembles/${at.ensembleId}/reread).`,
  );
}

const ORDER = ["energy-from", "energy-unit", "level"];

async function answerAll(tx: Transaction, at: At, answers: readonly Answer[]): Promise<void> {
  const ensemble = await lockEnsemble(tx, at);
  const inOrder = [...answers].sort((a, b) => ORDER.indexOf(a.id) - ORDER.indexOf(b.id));
  for (const { id, option } of inOrder) {
    // An answer may bring the next question, which the same call may answer.
    const question = (await findQuestions(at.ensembleId, tx)).find((one) => one.id === id);
    if (question === undefined) throw invalid(`Intake asked no question "${id}".`);
    const kept = question.answered === undefined ? checkOption(question, option) : option;
    // The same answer again is a call repeated after a lost connection.
    if (question.answered === kept) continue;
    if (question.answered !== undefined) {
      throw answeredBefore(question, at);
    }
    await markAnswered(tx, at, question, kept);
    await record(tx, at, question, kept, await settleAnswers(tx, ensemble));
  }
  await refresh(tx, at, ensemble);
}

/**
 * Answers what intake asked, in the order of the questions whatever the order of the call. Frames that waited are
 * released once nothing is open, and the first sift is asked for.
 *
 * @throws DomainError invalid for an unknown question or option, conflict where another answer was given before
 */
export async function answerQuestions(options: {
  actor: Actor;
  ensembleId: string;
  answers: readonly Answer[];
}): Promise<void> {
  const at = await accessEnsemble(options.actor, "take-in", options.ensembleId);
  refuseTwoOptions(options.answers);
  const given = await readingAnswers(at, options.answers);
  const energies = options.answers.filter(({ id }) => readAskId(id) === null);
  if (energies.length > 0) await inTransaction((tx) => answerAll(tx, at, energies));
  await answerReading(at, given);
  await siftAfterIntake(at);
}

function refuseTwoOptions(answers: readonly Answer[]): void {
  const given = new Map<string, string>();
  for (const { id, option } of answers) {
    const other = given.get(id);
    if (other !== undefined && other !== option) {
      throw invalid(
        `The question "${id}" has two options in this call, "${other}" and "${option}". Send one.`,
      );
    }
    given.set(id, option);
  }
}

/** Answers about the reading of the files, checked before any of the call is taken up; those given before are left out. */
async function readingAnswers(at: At, answers: readonly Answer[]): Promise<ReadingAnswer[]> {
  const asked = await findQuestions(at.ensembleId);
  return answers.flatMap(({ id, option }) => {
    if (readAskId(id) === null) return [];
    const question = asked.find((one) => one.id === id);
    if (question === undefined) throw invalid(`Intake asked no question "${id}".`);
    if (question.answered === option) return [];
    if (question.answered !== undefined) throw answeredBefore(question, at);
    return [{ question, option: checkOption(question, option) }];
  });
}
