import { and, asc, eq, inArray, isNull, like, ne, or } from "drizzle-orm";
import { db, inTransaction, type Queryable, type Transaction } from "../../db/client.server.ts";
import {
  batches,
  columns,
  ensembleFiles,
  ensembles,
  frameBlocks,
  frames,
  intakeMessages,
  questions,
} from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { type DecisionMode, type EnergyAnswers, NO_ENERGY } from "../../lib/intake/decide-energies.ts";
import type { ReadingChoices } from "../../lib/intake/reading-choices.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { recomputeComputed } from "../columns/recompute-computed.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { acceptedSha } from "./accepted-frames.server.ts";
import { type ChangedReading, changedReading, type GivenAnswer } from "./changed-reading.ts";
import { completeReading, type WrittenAnswers } from "./complete-reading.server.ts";
import { type Counts, countFrames, levelsInUse } from "./intake-rows.server.ts";
import { keepStated } from "./keep-stated.ts";
import { findQuestions } from "./load-intake.server.ts";
import { findStored, readStored, sourcesOf, takeBack } from "./read-stored.server.ts";
import { refreshChirality } from "./refresh-chirality.server.ts";
import { rereadBatches } from "./reread-batches.server.ts";
import { answersSoFar, type EnsembleRow } from "./settle-answers.server.ts";
import { siftAfterIntake } from "./sift-after-intake.server.ts";

type At = Grant & { ensembleId: string };

/** Columns that the files of an upload hold themselves; others came from elsewhere and stay. */
const fromFiles = or(
  like(columns.origin, "key:%"),
  like(columns.origin, "number:%"),
  like(columns.origin, "field:%"),
);

/** Frames that a person held, with the reason: a decision that outlives the reading. */
async function heldByHand(tx: Transaction, ensembleId: string) {
  return tx
    .select({ number: frames.number, note: frames.note })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.holdReason, "by-hand")));
}

/** Frames that a person released although their reader held them. */
async function releasedByHand(tx: Queryable, ensembleId: string) {
  return tx
    .select({ number: frames.number, note: frames.note })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.readState, "held"), ne(frames.state, "held")));
}

async function removeOld(tx: Transaction, ensembleId: string): Promise<void> {
  for (const table of [frames, frameBlocks, intakeMessages, questions, ensembleFiles]) {
    await tx.delete(table).where(eq(table.ensembleId, ensembleId));
  }
}

async function moveNew(tx: Transaction, from: string, to: string): Promise<void> {
  for (const table of [frames, frameBlocks, intakeMessages, questions, ensembleFiles]) {
    await tx.update(table).set({ ensembleId: to }).where(eq(table.ensembleId, from));
  }
}

function nameTaken(name: string): DomainError {
  const message = `The ensemble has a column "${name}" that did not come with its files. Give the level another name, or replace that column by a table with these values.`;
  return new DomainError("conflict", "The name is taken", message, { faults: [{ field: "level", message }] });
}

/** A level that keeps its name keeps its id and its place among the levels: recipes and hues go on meaning it. */
async function replaceColumns(tx: Transaction, from: string, to: string): Promise<void> {
  const facts = {
    ...{ id: columns.id, name: columns.name, kind: columns.kind, unit: columns.unit, origin: columns.origin },
    ...{
      rule: columns.rule,
      ordinal: columns.ordinal,
      solvent: columns.solvent,
      createdBy: columns.createdBy,
    },
    ...{ energyKind: columns.energyKind, temperature: columns.temperature, kindStated: columns.kindStated },
    geometryLevel: columns.geometryLevel,
  };
  const old = await tx
    .select(facts)
    .from(columns)
    .where(and(eq(columns.ensembleId, to), fromFiles));
  await tx.delete(columns).where(and(eq(columns.ensembleId, to), fromFiles));
  const read = await tx.select(facts).from(columns).where(eq(columns.ensembleId, from));
  const made = read.map((column) => ({ column, kept: keepStated(old, column) }));
  const others = await tx.select({ name: columns.name }).from(columns).where(eq(columns.ensembleId, to));
  const names = made.map(({ column, kept }) => kept.name ?? column.name);
  const taken = names.find((name, k) => names.indexOf(name) !== k || others.some((o) => o.name === name));
  if (taken !== undefined) throw nameTaken(taken);
  for (const { column, kept } of made) {
    await tx
      .update(columns)
      .set({ ...kept, ensembleId: to })
      .where(eq(columns.id, column.id));
  }
}

async function keepDecisions(
  tx: Transaction,
  ensembleId: string,
  held: { number: number; note: string | null }[],
  released: { number: number; note: string | null }[],
): Promise<void> {
  for (const { number, note } of held) {
    await tx
      .update(frames)
      .set({ state: "held", holdReason: "by-hand", note })
      .where(and(eq(frames.ensembleId, ensembleId), eq(frames.number, number), ne(frames.state, "held")));
  }
  for (const { number, note } of released) {
    await tx
      .update(frames)
      .set({ state: "remarked", holdReason: null, note })
      .where(
        and(
          eq(frames.ensembleId, ensembleId),
          eq(frames.number, number),
          inArray(frames.holdReason, ["far-off", "waits-for-answer"]),
        ),
      );
  }
  // What tells a release by hand from what was read stays, for the next time.
  const numbers = released.map(({ number }) => number);
  if (numbers.length === 0) return;
  await tx
    .update(frames)
    .set({ readState: "held" })
    .where(and(eq(frames.ensembleId, ensembleId), inArray(frames.number, numbers), ne(frames.state, "held")));
}

/** A batch that was added while the files were read would be lost. */
async function checkFilesStand(tx: Transaction, ensembleId: string, readId: string): Promise<void> {
  const [now, read] = [await findStored(ensembleId, tx), await findStored(readId, tx)];
  if (now.length === read.length) return;
  throw new DomainError(
    "conflict",
    "Files were added meanwhile",
    "While the files were read again, somebody added a batch. Nothing was changed; send the answers once more.",
  );
}

/** A question with its answer, which goes on standing when the files are read again. */
type AnsweredRow = typeof questions.$inferInsert;

/** What reading again starts from, and what stays of it. */
export interface RereadPlan {
  /** As they are kept from now on. */
  answers: WrittenAnswers;
  /** The same with what was asked and answered since. */
  energies: EnergyAnswers;
  kindStated: boolean;
  mode: Omit<DecisionMode, "comment">;
  /** How the files of further batches are to be read, by number; those left out stay as they are. */
  batchReadings: ReadonlyMap<number, ReadingChoices>;
  /** Answered questions that stay answered. */
  keeps(id: string): boolean;
  /** Those that this reading answers. */
  answered: readonly { id: string; option: string; text: string; optionText: string }[];
  /** Nothing but an answer to a question, which its entry says; else the reading has an entry of its own. */
  byAnswer: boolean;
}

async function answeredRows(tx: Transaction, at: At, plan: RereadPlan): Promise<AnsweredRow[]> {
  const rows = await tx.select().from(questions).where(eq(questions.ensembleId, at.ensembleId));
  const now = new Date();
  return rows.flatMap((row) => {
    const own = plan.answered.find(({ id }) => id === row.id);
    if (own) return [{ ...row, answered: own.option, answeredBy: at.userId, answeredAt: now }];
    return row.answered !== null && plan.keeps(row.id) ? [row] : [];
  });
}

async function keepAnswered(
  tx: Transaction,
  ensembleId: string,
  rows: readonly AnsweredRow[],
): Promise<void> {
  for (const row of rows) {
    await tx
      .insert(questions)
      .values({ ...row, ensembleId })
      .onDuplicateKeyUpdate({ set: { ensembleId } });
  }
}

async function keepBatchReadings(tx: Transaction, ensembleId: string, plan: RereadPlan): Promise<void> {
  const ofBatch = (batch: number) => and(eq(batches.ensembleId, ensembleId), eq(batches.batch, batch));
  await tx.update(batches).set({ answers: plan.answers }).where(ofBatch(0));
  for (const [batch, reading] of plan.batchReadings) {
    const [row] = await tx.select({ answers: batches.answers }).from(batches).where(ofBatch(batch));
    if (row)
      await tx
        .update(batches)
        .set({ answers: { ...row.answers, reading } })
        .where(ofBatch(batch));
  }
}

/**
 * How the energies were read until now: what was written with the upload, what was answered since, and where neither
 * names it, what the files said themselves. To be asked before the old rows go.
 */
async function readUntilNow(tx: Transaction, old: EnsembleRow): Promise<WrittenAnswers> {
  const known = answersSoFar(old, await findQuestions(old.id, tx));
  // A property that a person made into a level was not read as one.
  const [level] = await tx
    .select({ name: columns.name, from: columns.origin, unit: columns.unit })
    .from(columns)
    .where(
      and(eq(columns.ensembleId, old.id), eq(columns.kind, "energy"), isNull(columns.createdBy), fromFiles),
    )
    .orderBy(asc(columns.ordinal))
    .limit(1);
  return {
    ...old.answers,
    level: level?.name ?? known.level,
    energyUnit: level?.unit ?? known.energyUnit,
    energyFrom: level?.from ?? known.energyFrom,
  };
}

async function writeDown(
  tx: Transaction,
  at: At,
  plan: RereadPlan,
  old: { before: WrittenAnswers; accepted: number },
  now: { questions: number } & Counts,
): Promise<void> {
  for (const { id, text, option, optionText } of plan.answered) {
    const released = Math.max(0, now.accepted - old.accepted);
    await writeEntry(tx, at, at, {
      type: "answer",
      data: { question: id, text, option, optionText, released },
    });
  }
  if (plan.byAnswer) return;
  await writeEntry(tx, at, at, {
    type: "reread",
    data: { before: old.before, after: plan.answers, ...now },
  });
}

/** The new reading takes the place of the old one, in one moment. */
async function adopt(tx: Transaction, at: At, readId: string, plan: RereadPlan): Promise<void> {
  const rows = await tx
    .select()
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)))
    .for("update");
  const [read] = await tx.select().from(ensembles).where(eq(ensembles.id, readId));
  const old = rows[0];
  if (old === undefined || read === undefined) throw notFound();
  await checkFilesStand(tx, old.id, readId);
  const held = await heldByHand(tx, old.id);
  const released = await releasedByHand(tx, old.id);
  const answered = await answeredRows(tx, at, plan);
  const before = await readUntilNow(tx, old);
  await removeOld(tx, old.id);
  await moveNew(tx, readId, old.id);
  await keepAnswered(tx, old.id, answered);
  await replaceColumns(tx, readId, old.id);
  await keepDecisions(tx, old.id, held, released);
  const { formula, atoms, elements, bonds, bondTable, atomLabels, identity } = read;
  const { chirality, chiralityNote, readerVersion } = read;
  const molecule = {
    answers: plan.answers,
    formula,
    atoms,
    elements,
    bonds,
    // Orders from a SMILES are no matter of the files.
    bondTable:
      bondTable ?? (old.bondTable?.origin === "smiles" && old.bonds.equals(bonds) ? old.bondTable : null),
    atomLabels,
    identity,
    chirality,
    chiralityNote,
  };
  await tx
    .update(ensembles)
    .set({ ...molecule, readerVersion })
    .where(eq(ensembles.id, old.id));
  await keepBatchReadings(tx, old.id, plan);
  const counts = await countFrames(tx, old.id);
  const open = (await findQuestions(old.id, tx)).filter((question) => question.answered === undefined);
  await tx
    .update(ensembles)
    .set({
      ...counts,
      openQuestions: open.length,
      acceptedSha: await acceptedSha(tx, old.id),
      version: old.version + 1,
      changedAt: new Date(),
    })
    .where(eq(ensembles.id, old.id));
  await recomputeComputed(tx, old.id);
  await refreshChirality(tx, old.id);
  await tx.delete(ensembles).where(eq(ensembles.id, readId));
  await writeDown(tx, at, plan, { before, accepted: old.accepted }, { questions: open.length, ...counts });
}

/**
 * Reads the stored files of an ensemble again as a plan says, further batches behind the first upload, and puts what was
 * read into the place of what was there. Access has been decided; where anything is refused nothing changes.
 */
export async function readAgain(at: At, plan: RereadPlan): Promise<void> {
  const all = await findStored(at.ensembleId);
  const [files, further] = [all.filter(({ batch }) => batch === 0), all.filter(({ batch }) => batch > 0)];
  const before = await answersBefore(at);
  const { energyFrom } = plan.energies;
  const settled = new Set((await releasedByHand(db, at.ensembleId)).map(({ number }) => number));
  const { reading, result } = await readStored(at, files, {
    energyFrom: energyFrom === NO_ENERGY ? null : energyFrom,
    choices: plan.answers.reading ?? {},
    settled,
  });
  try {
    await completeReading(reading, result, {
      answers: plan.energies,
      kindStated: plan.kindStated,
      written: plan.answers,
      // The answer to a question would be for all frames alike, and batches have answers of their own.
      mode: further.length === 0 ? plan.mode : { ...plan.mode, refuseOpen: true, confirmUnit: false },
      sources: sourcesOf(reading, files),
    });
    await rereadBatches(at, reading.ensembleId, further, {
      before,
      readings: plan.batchReadings,
      settled,
    });
    await inTransaction((tx) => adopt(tx, at, reading.ensembleId, plan));
  } catch (error) {
    await takeBack(reading);
    throw error;
  }
  await siftAfterIntake(at);
}

/**
 * Reads the stored files of an ensemble again with other answers; the ensemble keeps its id. What a person decided on
 * single frames stays decided, and what was answered of the reading itself, where no other answer is given. A program
 * that leaves unit or level open is refused and nothing changes; a person is asked.
 *
 * @param options.given new answers to questions about the reading of the files; `ASK_AGAIN` opens one again
 * @throws DomainError invalid for an unknown question or option
 */
export async function rereadEnsemble(options: {
  actor: Actor;
  ensembleId: string;
  answers: WrittenAnswers;
  kindStated: boolean;
  given?: readonly GivenAnswer[];
}): Promise<void> {
  const at = await accessEnsemble(options.actor, "take-in", options.ensembleId);
  const { reading: before } = await answersBefore(at);
  const anew = changedReading(await findQuestions(at.ensembleId), options.given ?? []);
  const reading = anew.apply(before, 0);
  const interactive = options.actor.kind === "user";
  await readAgain(at, {
    answers: { ...options.answers, ...(reading ? { reading } : {}) },
    energies: options.answers,
    kindStated: options.kindStated,
    mode: {
      refuseOpen: !interactive,
      confirmUnit: interactive,
      knownLevels: interactive ? await levelsInUse(at.teamId, at.ensembleId) : [],
    },
    batchReadings: await batchReadingsWith(at, anew),
    // What was answered of the reading itself holds for other energies too.
    keeps: (id) => readAskId(id) !== null && !anew.opens(id),
    answered: anew.answered,
    byAnswer: false,
  });
}

/** Readings of further batches that the new answers change. */
async function batchReadingsWith(at: At, anew: ChangedReading): Promise<Map<number, ReadingChoices>> {
  const readings = new Map<number, ReadingChoices>();
  for (const batch of anew.batches.filter((one) => one > 0)) {
    const [row] = await db
      .select({ answers: batches.answers })
      .from(batches)
      .where(and(eq(batches.ensembleId, at.ensembleId), eq(batches.batch, batch)));
    readings.set(batch, anew.apply(row?.answers.reading, batch) ?? {});
  }
  return readings;
}

/** The answers that the ensemble was read with until now. */
export async function answersBefore(at: At): Promise<WrittenAnswers> {
  const rows = await db
    .select({ answers: ensembles.answers })
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId)));
  const row = rows[0];
  if (row === undefined) throw notFound();
  return row.answers;
}
