import { eq } from "drizzle-orm";
import type { z } from "zod";
import { db } from "../../db/client.server.ts";
import { type answersSchema, ensembleFiles, ensembles } from "../../db/schema.server.ts";
import { type DecisionMode, decideEnergies, type EnergyAnswers } from "../../lib/intake/decide-energies.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { type NewColumn, settleEnergies } from "../../lib/intake/settle-energies.ts";
import { acceptedSha } from "./accepted-frames.server.ts";
import {
  type Counts,
  chiralityOf,
  countFrames,
  holdForAnswers,
  insertColumns,
  insertMessages,
  insertQuestions,
  remarkFrames,
} from "./intake-rows.server.ts";
import { packBonds, packElements } from "./molecule.server.ts";
import type { Reading, ReadResult } from "./reading.server.ts";
import { scanComments } from "./scan-comments.server.ts";

export type WrittenAnswers = z.infer<typeof answersSchema>;

/** What is kept of the group for a further batch; a person's page shows only the words on it. */
function identityOf({ group }: ReadResult) {
  const { charge, multiplicity, configuration, seen } = group;
  return { charge, multiplicity, configuration, ...(seen ? { seen } : {}) };
}

/** Orders, charges and radicals as the files state them. */
export function bondTableOf({
  classification,
  graph,
}: ReadResult): (typeof ensembles.$inferInsert)["bondTable"] {
  const { table } = classification;
  if (table?.orders == null) return null;
  const atoms = graph.elements.length;
  const list = (values: ArrayLike<number> | null) =>
    values === null ? new Array<number>(atoms).fill(0) : Array.from(values);
  return {
    origin: "file",
    orders: Array.from(table.orders),
    charges: list(table.charges),
    radicals: list(table.radicals),
  };
}

/** The scan of the comments, made anew where the number or its decimal comma was known only after the files. */
export async function scanWith(reading: Reading, result: ReadResult, energyFrom: string | null) {
  const named = energyFrom === "none" ? null : energyFrom;
  const { decimalCommas, scanAgain } = reading;
  if (reading.options.energyFrom === named && !scanAgain) return result;
  const files = result.files.map(({ entry, ...file }) => ({ ...file, name: entry ?? file.name }));
  return scanComments(reading.ensembleId, files, named, { decimalCommas });
}

export interface CompletedReading {
  counts: Counts;
  questions: number;
}

/**
 * Decides on energies and writes everything of an ensemble but what makes it visible. All of it hangs on the row in
 * flight and goes with it.
 *
 * @param options.sources ids of the kept files by position
 * @throws DomainError invalid where a program left unit or level open, or named a number that no frame has
 */
export async function completeReading(
  reading: Reading,
  result: ReadResult,
  options: {
    answers: EnergyAnswers;
    kindStated: boolean;
    written: WrittenAnswers;
    mode: Omit<DecisionMode, "comment">;
    sources: readonly string[];
  },
): Promise<CompletedReading> {
  const { ensembleId } = reading;
  const { answers, mode } = options;
  const accepted = usable(result);
  const scanned = await scanWith(reading, result, answers.energyFrom);
  const findings = scanned.scan.finish(accepted);
  const decision = decideEnergies(findings, result.group.elements, answers, {
    ...mode,
    comment: result.firstComment,
  });
  const settled =
    decision.kind === "ask"
      ? null
      : settleEnergies(decision, {
          findings,
          answers,
          kindStated: options.kindStated,
          extended: result.extended,
          frames: result.frames,
          accepted,
        });
  const open = decision.kind === "ask" ? decision.questions : [];
  const questions = [...result.questions, ...open];
  if (settled) await remarkFrames(db, ensembleId, settled.messages);
  if (open.length > 0) await holdForAnswers(db, ensembleId);
  result.messages.addAll(settled?.messages ?? []);
  await insertColumns(db, ensembleId, settled?.columns ?? []);
  await insertQuestions(db, ensembleId, questions);
  await insertMessages(db, ensembleId, listed(result, accepted));
  await insertFiles(reading, options.sources);
  const energies = settled?.columns.find((column) => column.kind === "energy") ?? null;
  const counts = await writeMolecule(reading, result, options.written, questions.length, energies);
  return { counts, questions: questions.length };
}

/** Frames that take part, those that wait for an answer included. */
export function usable({ decisions }: ReadResult): (frame: number) => boolean {
  const held = new Set<number>();
  for (const { number, state, holdReason } of decisions.values()) {
    if (state === "held" && holdReason !== "waits-for-answer") held.add(number);
  }
  return (frame) => !held.has(frame);
}

/** One message a frame that is held: why; its remarks would only hide that. */
export function listed(result: ReadResult, accepted: (frame: number) => boolean): IntakeMessage[] {
  return result.messages
    .messages()
    .filter(({ severity, frame }) => severity !== "remark" || frame === undefined || accepted(frame));
}

/** @param sources ids of the kept files, one a file of the reading */
export async function insertFiles(reading: Reading, sources: readonly string[], batch = 0): Promise<void> {
  await db.insert(ensembleFiles).values(
    reading.files.map(({ source: _, ...file }, at) => ({
      ...file,
      name: [...file.name].slice(0, 255).join(""),
      ensembleId: reading.ensembleId,
      batch,
      sourceId: sources[at] ?? "",
    })),
  );
}

async function writeMolecule(
  reading: Reading,
  result: ReadResult,
  written: WrittenAnswers,
  openQuestions: number,
  energies: NewColumn | null,
): Promise<Counts> {
  const { ensembleId } = reading;
  const { group, graph, classification } = result;
  const here = eq(ensembles.id, ensembleId);
  const chirality =
    openQuestions > 0
      ? { chirality: classification.chirality, chiralityNote: classification.chiralityNote.slice(0, 500) }
      : await chiralityOf(db, ensembleId, graph, group.configuration, energies);
  const counts = await countFrames(db, ensembleId);
  await db
    .update(ensembles)
    .set({
      answers: written,
      formula: classification.formula,
      atoms: graph.elements.length,
      elements: packElements(graph.elements, graph.isotopes),
      bonds: packBonds(graph.bonds),
      atomLabels: result.atomLabels,
      identity: identityOf(result),
      bondTable: bondTableOf(result),
      readerVersion: reading.readerVersion,
      ...chirality,
      ...counts,
      openQuestions,
    })
    .where(here);
  await db
    .update(ensembles)
    .set({ acceptedSha: await acceptedSha(db, ensembleId) })
    .where(here);
  return counts;
}
