import { and, asc, eq, inArray, isNull, ne, or } from "drizzle-orm";
import type { Transaction } from "../../db/client.server.ts";
import { ensembleFiles, ensembles, frames, questions as questionTable } from "../../db/schema.server.ts";
import type { Configuration } from "../../lib/chem/stereo.ts";
import {
  decideEnergies,
  type EnergyAnswers,
  type EnergyDecision,
  kindWasStated,
  NO_ENERGY,
} from "../../lib/intake/decide-energies.ts";
import { MessageList } from "../../lib/intake/message-list.ts";
import { HOLD, isEnsembleAsk } from "../../lib/intake/reading-choices.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import type { IntakeQuestion } from "../../lib/intake/report.ts";
import { type SettledEnergies, settleEnergies } from "../../lib/intake/settle-energies.ts";
import type { Graph } from "../../lib/structure.ts";
import {
  chiralityOf,
  insertColumns,
  insertMessages,
  insertQuestions,
  levelsInUse,
  releaseAnswered,
  remarkFrames,
} from "./intake-rows.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { unpackMolecule } from "./molecule.server.ts";
import { type ScannedFile, scanComments } from "./scan-comments.server.ts";

export type EnsembleRow = typeof ensembles.$inferSelect;

/** What is known so far: the request's own answers, and what was asked and answered since. */
export function answersSoFar(
  { answers }: Pick<EnsembleRow, "answers">,
  asked: readonly IntakeQuestion[],
): EnergyAnswers {
  const answered = (id: string) => asked.find((question) => question.id === id)?.answered ?? null;
  const unit = answered("energy-unit");
  return {
    energyFrom: unit === NO_ENERGY ? NO_ENERGY : (answered("energy-from") ?? answers.energyFrom),
    energyUnit: unit ?? answers.energyUnit,
    level: answered("level") ?? answers.level,
    energyKind: answers.energyKind,
    energyTemperature: answers.energyTemperature,
  };
}

/** Frames that take part once nothing is open. */
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

async function scannedFiles(tx: Transaction, ensembleId: string): Promise<ScannedFile[]> {
  const files = await tx
    .select({
      position: ensembleFiles.position,
      name: ensembleFiles.name,
      entry: ensembleFiles.entry,
      format: ensembleFiles.format,
    })
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, ensembleId))
    .orderBy(asc(ensembleFiles.position));
  return files.map(({ position, name, entry, format }) => ({ position, name: entry ?? name, format }));
}

interface Decided {
  decision: EnergyDecision;
  /** Null while something is open. */
  settled: SettledEnergies | null;
  graph: Graph;
}

/** The decision with all answers so far, from the stored comment lines. */
async function decide(
  tx: Transaction,
  ensemble: EnsembleRow,
  asked: readonly IntakeQuestion[],
): Promise<Decided> {
  const answers = answersSoFar(ensemble, asked);
  const named = answers.energyFrom === NO_ENERGY ? null : answers.energyFrom;
  const scanned = await scanComments(ensemble.id, await scannedFiles(tx, ensemble.id), named, {
    // Until it is answered the files are read as proposed.
    decimalCommas: asked.some(({ id, answered }) => id === "decimal-comma" && answered !== HOLD),
    on: tx,
  });
  const used = await waitingOrAccepted(tx, ensemble.id);
  const accepted = (frame: number) => used.has(frame);
  const findings = scanned.scan.finish(accepted);
  const graph = unpackMolecule(ensemble);
  const decision = decideEnergies(findings, graph.elements, answers, {
    refuseOpen: false,
    confirmUnit: ensemble.createdByToken === null,
    knownLevels: await levelsInUse(ensemble.teamId, ensemble.id),
    comment: scanned.firstComment,
  });
  if (decision.kind === "ask") return { decision, settled: null, graph };
  const settled = settleEnergies(decision, {
    findings,
    answers,
    kindStated: kindWasStated(ensemble.answers),
    extended: scanned.extended,
    frames: ensemble.frames,
    accepted,
  });
  return { decision, settled, graph };
}

const ENERGY_QUESTIONS = ["energy-from", "energy-unit", "level"];

/** Writes the columns and releases what waited; returns how many frames that were. */
async function writeSettled(
  tx: Transaction,
  ensemble: EnsembleRow,
  settled: SettledEnergies,
  graph: Graph,
): Promise<number> {
  const { id } = ensemble;
  // A question that became pointless, such as the level of what is no energy, goes.
  await tx
    .delete(questionTable)
    .where(
      and(
        eq(questionTable.ensembleId, id),
        isNull(questionTable.answered),
        inArray(questionTable.id, ENERGY_QUESTIONS),
      ),
    );
  await insertColumns(tx, id, settled.columns);
  // What the reading itself leaves open is answered by reading again, which releases all.
  const waits = (await findQuestions(id, tx)).some(
    (one) => one.answered === undefined && !isEnsembleAsk(readAskId(one.id)?.ask),
  );
  const released = waits ? 0 : await releaseAnswered(tx, id);
  await remarkFrames(tx, id, settled.messages);
  const list = new MessageList();
  list.addAll(settled.messages);
  await insertMessages(tx, id, list.messages());
  const energies = settled.columns.find((column) => column.kind === "energy") ?? null;
  const { configuration } = ensemble.identity as { configuration: Configuration };
  const chirality = await chiralityOf(tx, id, graph, configuration, energies);
  await tx.update(ensembles).set(chirality).where(eq(ensembles.id, id));
  return released;
}

/**
 * Decides again with what is known now: more to ask, or the columns and the release of what waited.
 *
 * @returns how many frames were released
 */
export async function settleAnswers(tx: Transaction, ensemble: EnsembleRow): Promise<number> {
  const asked = await findQuestions(ensemble.id, tx);
  const { decision, settled, graph } = await decide(tx, ensemble, asked);
  if (settled !== null) return writeSettled(tx, ensemble, settled, graph);
  const open = new Set(asked.filter(({ answered }) => answered === undefined).map(({ id }) => id));
  const now = decision.kind === "ask" ? decision.questions : [];
  // The level that was proposed may have been that of another number than the one chosen since.
  for (const question of now.filter(({ id }) => id === "level" && open.has(id))) {
    await tx
      .update(questionTable)
      .set({ options: [...question.options] })
      .where(and(eq(questionTable.ensembleId, ensemble.id), eq(questionTable.id, question.id)));
  }
  await insertQuestions(
    tx,
    ensemble.id,
    now.filter(({ id }) => !open.has(id)),
  );
  return 0;
}
