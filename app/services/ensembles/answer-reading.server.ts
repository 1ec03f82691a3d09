import { and, eq } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { batches, ensembles, questions } from "../../db/schema.server.ts";
import { kindWasStated } from "../../lib/intake/decide-energies.ts";
import { isEnsembleAsk, type ReadingChoices } from "../../lib/intake/reading-choices.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import type { IntakeQuestion } from "../../lib/intake/report.ts";
import type { Grant } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { levelsInUse } from "./intake-rows.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { readAgain } from "./reread-ensemble.server.ts";
import { answersSoFar } from "./settle-answers.server.ts";

type At = Grant & { ensembleId: string };

/** A question about the reading of the files, and the option that was chosen. */
export interface ReadingAnswer {
  question: IntakeQuestion;
  option: string;
}

/** Answers until now and those given, of one batch. */
function merged(
  before: ReadingChoices | undefined,
  given: readonly ReadingAnswer[],
  batch: number,
): ReadingChoices {
  const choices: Record<string, string> = { ...before };
  for (const { question, option } of given) {
    const asked = readAskId(question.id);
    if (asked?.batch === batch) choices[asked.ask] = option;
  }
  return choices;
}

async function batchReadings(at: At, given: readonly ReadingAnswer[]): Promise<Map<number, ReadingChoices>> {
  const numbers = new Set(given.map(({ question }) => readAskId(question.id)?.batch ?? 0));
  numbers.delete(0);
  const readings = new Map<number, ReadingChoices>();
  for (const batch of numbers) {
    const [row] = await db
      .select({ answers: batches.answers })
      .from(batches)
      .where(and(eq(batches.ensembleId, at.ensembleId), eq(batches.batch, batch)));
    readings.set(batch, merged(row?.answers.reading, given, batch));
  }
  return readings;
}

/**
 * The molecule or the configuration that was taken already is confirmed: nothing needs to be read again now, and what is
 * read later is read so.
 */
async function confirm(at: At, given: readonly ReadingAnswer[]): Promise<void> {
  await inTransaction(async (tx) => {
    const here = eq(ensembles.id, at.ensembleId);
    const [row] = await tx.select({ answers: ensembles.answers }).from(ensembles).where(here).for("update");
    if (row === undefined) throw notFound();
    const reading = merged(row.answers.reading, given, 0) as Record<string, string>;
    const answers = { ...row.answers, reading };
    await tx.update(ensembles).set({ answers }).where(here);
    await tx
      .update(batches)
      .set({ answers })
      .where(and(eq(batches.ensembleId, at.ensembleId), eq(batches.batch, 0)));
    for (const { question, option } of given) {
      await tx
        .update(questions)
        .set({ answered: option, answeredBy: at.userId, answeredAt: new Date() })
        .where(and(eq(questions.ensembleId, at.ensembleId), eq(questions.id, question.id)));
      await writeEntry(tx, at, at, {
        type: "answer",
        data: { ...entryOf({ question, option }), released: 0 },
      });
    }
    const open = (await findQuestions(at.ensembleId, tx)).filter(({ answered }) => answered === undefined);
    await tx.update(ensembles).set({ openQuestions: open.length, changedAt: new Date() }).where(here);
  });
}

function entryOf({ question, option }: ReadingAnswer) {
  const optionText = question.options.find(({ id }) => id === option)?.text ?? option;
  return { question: question.id, text: question.text, option, optionText };
}

const confirmsTaken = ({ question, option }: ReadingAnswer) =>
  isEnsembleAsk(readAskId(question.id)?.ask) &&
  question.options.some(({ id, proposed }) => id === option && proposed === true);

/**
 * Answers what was asked of how the files are to be read: they are read again with it, and the frames that waited are
 * used or stay held. What was answered of the energies stays.
 *
 * @param given questions that are open, with one of their options
 */
export async function answerReading(at: At, given: readonly ReadingAnswer[]): Promise<void> {
  if (given.length === 0) return;
  if (given.every(confirmsTaken)) return confirm(at, given);
  const [row] = await db
    .select()
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId)));
  if (row === undefined) throw notFound();
  const asked = await findQuestions(at.ensembleId);
  await readAgain(at, {
    answers: { ...row.answers, reading: merged(row.answers.reading, given, 0) as Record<string, string> },
    energies: answersSoFar(row, asked),
    kindStated: kindWasStated(row.answers),
    mode: {
      refuseOpen: false,
      confirmUnit: row.createdByToken === null,
      knownLevels: await levelsInUse(at.teamId, at.ensembleId),
    },
    batchReadings: await batchReadings(at, given),
    keeps: () => true,
    answered: given.map((answer) => {
      const { question: id, ...words } = entryOf(answer);
      return { id, ...words };
    }),
    byAnswer: true,
  });
}
