import { and, asc, eq, isNull, ne, or } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import {
  ensembleFiles,
  ensembles,
  frames,
  intakeMessages,
  questions as questionTable,
} from "../../db/schema.server.ts";
import type { Configuration } from "../../lib/chem/stereo.ts";
import { DomainError } from "../../lib/errors.ts";
import { decideEnergies, type EnergyAnswers, NO_ENERGY } from "../../lib/intake/decide-energies.ts";
import type { IntakeQuestion } from "../../lib/intake/report.ts";
import { settleEnergies } from "../../lib/intake/settle-energies.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { acceptedSha } from "./accepted-frames.server.ts";
import {
  chiralityOf,
  countFrames,
  insertColumns,
  insertMessages,
  insertQuestions,
  levelsInUse,
  releaseAnswered,
  remarkFrames,
} from "./intake-rows.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { unpackMolecule } from "./molecule.server.ts";
import { scanComments } from "./scan-comments.server.ts";
import { siftAfterIntake } from "./sift-after-intake.server.ts";

export interface Answer {
  id: string;
  option: string;
}

type At = Grant & { ensembleId: string };
type EnsembleRow = typeof ensembles.$inferSelect;

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

/** What is known so far: the request's own answers, and what was asked and answered since. */
function answersSoFar(ensemble: EnsembleRow, asked: readonly IntakeQuestion[]): EnergyAnswers {
  const answered = (id: string) => asked.find((question) => question.id === id)?.answered ?? null;
  const unit = answered("energy-unit");
  const { answers } = ensemble;
  return {
    energyFrom: unit === NO_ENERGY ? NO_ENERGY : (answered("energy-from") ?? answers.energyFrom),
    energyUnit: unit ?? answers.energyUnit,
    level: answered("level") ?? answers.level,
    energyKind: answers.energyKind,
    energyTemperature: answers.energyTemperature,
  };
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

/** Decides again with what is known now: more to ask, or the column and the release of what waited. */
async function settle(tx: Transaction, at: At, ensemble: EnsembleRow): Promise<number> {
  const asked = await findQuestions(at.ensembleId, tx);
  const answers = answersSoFar(ensemble, asked);
  const files = await tx
    .select({ name: ensembleFiles.name })
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, at.ensembleId))
    .orderBy(asc(ensembleFiles.position));
  const named = answers.energyFrom === NO_ENERGY ? null : answers.energyFrom;
  const scanned = await scanComments(
    at.ensembleId,
    files.map((file) => file.name),
    named,
    tx,
  );
  const waiting = await waitingOrAccepted(tx, at.ensembleId);
  const findings = scanned.scan.finish((frame) => waiting.has(frame));
  const graph = unpackMolecule(ensemble);
  const decision = decideEnergies(findings, graph.elements, answers, {
    refuseOpen: false,
    confirmUnit: ensemble.createdByToken === null,
    knownLevels: await levelsInUse(at.teamId),
    comment: scanned.firstComment,
  });
  if (decision.kind === "ask") {
    const open = new Set(asked.filter(({ answered }) => answered === undefined).map(({ id }) => id));
    await insertQuestions(
      tx,
      at.ensembleId,
      decision.questions.filter(({ id }) => !open.has(id)),
    );
    return 0;
  }
  // A question that became pointless, such as the level of what is no energy, goes.
  await tx
    .delete(questionTable)
    .where(and(eq(questionTable.ensembleId, at.ensembleId), isNull(questionTable.answered)));
  const settled = settleEnergies(decision, {
    candidates: findings.candidates,
    answers,
    kindStated: answers.energyKind !== "electronic",
    extended: scanned.extended,
    frames: ensemble.frames,
    accepted: (frame) => waiting.has(frame),
  });
  await insertColumns(tx, at.ensembleId, settled.columns);
  const released = await releaseAnswered(tx, at.ensembleId);
  await remarkFrames(tx, at.ensembleId, settled.messages);
  await tx
    .delete(intakeMessages)
    .where(and(eq(intakeMessages.ensembleId, at.ensembleId), eq(intakeMessages.severity, "question")));
  await insertMessages(tx, at.ensembleId, settled.messages);
  const energies = settled.columns.find((column) => column.kind === "energy") ?? null;
  const { configuration } = ensemble.identity as { configuration: Configuration };
  const chirality = await chiralityOf(tx, at.ensembleId, graph, configuration, energies);
  await tx.update(ensembles).set(chirality).where(eq(ensembles.id, at.ensembleId));
  return released;
}

async function waitingOrAccepted(tx: Transaction, ensembleId: string): Promise<Set<number>> {
  const rows = await tx
    .select({ number: frames.number })
    .from(frames)
    .where(
      and(
        eq(frames.ensembleId, ensembleId),
        or(ne(frames.state, "held"), eq(frames.holdReason, "waits-for-answer")),
      ),
    );
  return new Set(rows.map((row) => row.number));
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
      throw new DomainError(
        "conflict",
        "Answered before",
        `"${question.text}" was answered "${question.answered}" before. Read the files again to answer it anew.`,
      );
    }
    await markAnswered(tx, at, question, kept);
    await record(tx, at, question, kept, await settle(tx, at, ensemble));
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
  await inTransaction((tx) => answerAll(tx, at, options.answers));
  await siftAfterIntake(at);
}
