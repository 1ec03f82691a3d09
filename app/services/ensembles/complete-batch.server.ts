import { and, asc, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, type ensembles } from "../../db/schema.server.ts";
import { packedFrames, unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { asEnergyUnit, batchAnswers, type OwnLevel, relativeZeros } from "../../lib/intake/batch-energies.ts";
import { decideEnergies, type EnergyAnswers, NO_ENERGY } from "../../lib/intake/decide-energies.ts";
import type { EnergyFindings } from "../../lib/intake/energies.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { type NewColumn, settleEnergies } from "../../lib/intake/settle-energies.ts";
import { insertFiles, listed, scanWith, usable } from "./complete-reading.server.ts";
import { insertMessages, insertQuestions, remarkFrames } from "./intake-rows.server.ts";
import type { Reading, ReadResult } from "./reading.server.ts";

type EnsembleRow = typeof ensembles.$inferSelect;

/** Where the files of an upload have their numbers. */
const isFileOrigin = (origin: string | null) => /^(key|number|field):/.test(origin ?? "");

/**
 * The level that the energies of a further batch belong to where nothing is said: the one named, else the one that the
 * ensemble's own files brought.
 */
export async function ownLevel(ensemble: EnsembleRow, named: string | null): Promise<OwnLevel | null> {
  const rows = await db
    .select()
    .from(columns)
    .where(and(eq(columns.ensembleId, ensemble.id), eq(columns.kind, "energy")))
    .orderBy(asc(columns.ordinal));
  const row =
    named === null
      ? (rows.find(({ origin }) => isFileOrigin(origin)) ?? (rows.length === 1 ? rows[0] : undefined))
      : rows.find(({ name, id }) => name === named || id === named);
  const unit = asEnergyUnit(row?.unit ?? null);
  if (row === undefined || unit === null) return null;
  const { values, present } = unpackColumn(row.data, packedFrames(row.data));
  const there = [...values].filter((_, k) => present[k] === 1);
  return {
    name: row.name,
    origin: row.origin ?? "",
    unit,
    energyKind: row.energyKind ?? "electronic",
    temperature: row.temperature,
    lowest: there.length === 0 ? null : there.reduce((low, value) => Math.min(low, value)),
    highest: there.length === 0 ? null : there.reduce((high, value) => Math.max(high, value)),
  };
}

/** The number to look for before the files are read; null where nothing is said and the ensemble has none of its own. */
export function numberOf(stated: string | null, level: OwnLevel | null): string | null {
  if (stated !== null) return stated === NO_ENERGY ? null : stated;
  return level !== null && isFileOrigin(level.origin) ? level.origin : null;
}

/** The number that was said; that of the ensemble where the batch has it; else what the comments themselves show. */
async function findNumber(
  reading: Reading,
  result: ReadResult,
  stated: EnergyAnswers,
  level: OwnLevel | null,
  accepted: (frame: number) => boolean,
): Promise<EnergyFindings> {
  const from = numberOf(stated.energyFrom, level);
  const look = async (named: string | null) => (await scanWith(reading, result, named)).scan.finish(accepted);
  if (from === null || stated.energyFrom !== null) return look(from);
  try {
    return await look(from);
  } catch (error) {
    if (!(error instanceof DomainError) || error.code !== "invalid") throw error;
    return look(null);
  }
}

/** Several numbers could be the energy, and nobody said which. */
function notClear(findings: EnergyFindings): DomainError {
  const shown = findings.candidates
    .slice(0, 6)
    .map(({ from, first }) => `${from} (${first[0] ?? "none"} in the first frame)`);
  const message = `It is not clear which number of these files is the energy: ${shown.join(", ")}. Name it with energyFrom, or send energyFrom=none.`;
  return new DomainError("invalid", "The energies are not clear", message, {
    faults: [{ field: "energyFrom", message }],
  });
}

export interface CompletedBatch {
  /** Over all frames of the ensemble and the batch, those of the ensemble absent. */
  columns: NewColumn[];
}

/**
 * Decides on the energies of a batch and writes what belongs to its frames; all of it hangs on the row in flight.
 *
 * @param ensemble the one that it joins, as it was when the reading began
 * @param options.sources ids of the kept files, one a file of the reading
 * @throws DomainError invalid where number, unit or level stay open
 */
export async function completeBatch(
  reading: Reading,
  result: ReadResult,
  ensemble: EnsembleRow,
  options: { stated: EnergyAnswers; kindStated: boolean; sources: readonly string[]; batch: number },
): Promise<CompletedBatch> {
  const { stated } = options;
  const accepted = usable(result);
  const level = await ownLevel(ensemble, stated.level);
  const findings = await findNumber(reading, result, stated, level, accepted);
  const known = batchAnswers(findings, result.group.elements, stated, level);
  const answers = options.kindStated
    ? { ...known, energyKind: stated.energyKind, energyTemperature: stated.energyTemperature }
    : known;
  const decision = decideEnergies(findings, result.group.elements, answers, {
    refuseOpen: true,
    confirmUnit: false,
    knownLevels: [],
    comment: result.firstComment,
  });
  if (decision.kind === "ask") throw notClear(findings);
  const settled = settleEnergies(decision, {
    findings,
    answers,
    kindStated: true,
    extended: result.extended,
    frames: ensemble.frames + result.frames,
    accepted,
  });
  const messages = [...settled.messages, ...batchRemarks(decision.kind, findings, result, level, accepted)];
  await remarkFrames(db, reading.ensembleId, messages);
  result.messages.addAll(messages);
  await insertMessages(db, reading.ensembleId, listed(result, accepted));
  await insertFiles(reading, options.sources, options.batch);
  await insertQuestions(db, reading.ensembleId, result.questions);
  return { columns: settled.columns };
}

function batchRemarks(
  kind: "none" | "column",
  findings: EnergyFindings,
  result: ReadResult,
  level: OwnLevel | null,
  accepted: (frame: number) => boolean,
): IntakeMessage[] {
  const file = result.files[0]?.name ?? "";
  if (kind === "column") return relativeZeros({ lowest: findings.chosen?.min ?? null, file }, level);
  if (level === null) return [];
  return findings.rows
    .filter(({ frame }) => accepted(frame))
    .map(({ frame, file: own, line, textLine }) => ({
      code: "E10",
      severity: "remark",
      file: own,
      frame,
      line: textLine ?? line + 1,
      message: `The frame has no energy at “${level.name}”.`,
      hint: "It is accepted but gets no population; a value can be added later with a table.",
    }));
}
