import { and, eq } from "drizzle-orm";
import { db, inTransaction, type Queryable, type Transaction } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { columns } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { type ColumnFields, type ColumnsPreview, columnFieldsSchema } from "../../lib/api/schemas.ts";
import { DomainError, type Fault } from "../../lib/errors.ts";
import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage, IntakeQuestion } from "../../lib/intake/report.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns } from "../ensembles/find-columns.server.ts";
import { openFile } from "../ensembles/open-file.server.ts";
import type { FormReader } from "../ensembles/read-multipart.server.ts";
import { siftAfterLevels } from "../ensembles/sift-after-intake.server.ts";
import { readSource } from "../ensembles/source-writer.server.ts";
import { log } from "../log.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { statedAnswers } from "./column-answers.ts";
import { detectFormat } from "./detect-format.ts";
import type { FilePlan } from "./plan.ts";
import { planStructureFile } from "./plan-structures.server.ts";
import { kindsOf, planTableFile } from "./plan-table.server.ts";
import { type ReceivedFile, receiveFile } from "./receive-file.server.ts";
import { recomputeDerived } from "./recompute-derived.server.ts";
import { standingColumns } from "./standing-columns.server.ts";
import { kindClash, lockEnsemble, storeColumn, touchEnsemble } from "./store-column.server.ts";
import { loadTarget, type TargetEnsemble } from "./target.server.ts";

type At = Grant & { ensembleId: string };

/** A column as the API lists it. */
export interface ListedColumn {
  id: string;
  name: string;
  kind: "energy" | "property";
  unit: string | null;
  count: number;
  missing: number;
}

export type AddedColumns =
  | { kind: "stored"; columns: ListedColumn[]; messages: IntakeMessage[] }
  | { kind: "preview"; preview: ColumnsPreview };

/**
 * What the file would become, by what it is. Where it is open how numbers are written, they are read as is proposed: read
 * in another way most cells would be no numbers, and the remarks on what is missing would be wrong.
 */
async function planFile(file: ReceivedFile, target: TargetEnsemble): Promise<FilePlan> {
  const plan = await readFile(file, target, file.fields);
  const open = plan.questions.find(({ id }) => id === "numbers");
  if (open === undefined) return plan;
  const style = columnFieldsSchema.shape.numbers.safeParse(open.options.find(({ proposed }) => proposed)?.id);
  if (!style.success || style.data === undefined) {
    return { ...plan, messages: plan.messages.filter(({ code }) => !code.startsWith("E")) };
  }
  try {
    const read = await readFile(file, target, { ...file.fields, numbers: style.data });
    return { ...read, questions: [open, ...read.questions] };
  } catch (error) {
    // What is wrong by the proposed reading may be right by another: the question stays.
    if (error instanceof IntakeRejection) return plan;
    throw error;
  }
}

async function readFile(file: ReceivedFile, target: TargetEnsemble, fields: ColumnFields): Promise<FilePlan> {
  const { name } = file;
  const remarks: IntakeMessage[] = [];
  const remark = (message: IntakeMessage) => remarks.push(message);
  const opened = await openFile(readSource(file.sourceId), {
    file: name,
    limit: env().MAX_FILE_BYTES,
    remark,
  });
  const { format, bytes } = await detectFormat(name, opened.bytes, remark);
  const plan =
    format === "table"
      ? await planTableFile(name, bytes, target, fields)
      : await planStructureFile(name, format, bytes, target, fields);
  return { ...plan, messages: [...remarks, ...plan.messages] };
}

/** 422 that names for every open point the field that answers it. */
function openPoints(name: string, questions: readonly IntakeQuestion[]): DomainError {
  const faults = questions.map(({ id, text, reason, options }): Fault => {
    const choices = options.slice(0, 6).map((option) => `${id}=${option.id}`);
    // Without options the reason says what to do: stating the field would not help.
    const how = choices.length === 0 ? "" : `State ${choices.join(" or ")}.`;
    return { field: id, file: name, message: `${text} ${reason ?? ""} ${how}`.replace(/\s+/g, " ").trim() };
  });
  const detail = faults.map(({ message }) => message).join(" ");
  return new DomainError("invalid", "The file leaves something open", detail, {
    faults,
    extra: { code: questions[0]?.code, questions },
  });
}

async function namesOf(ensembleId: string, on: Queryable = db): Promise<Set<string>> {
  const rows = await on
    .select({ name: columns.name })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId));
  return new Set(rows.map(({ name }) => name));
}

async function previewOf(name: string, plan: FilePlan, target: TargetEnsemble): Promise<ColumnsPreview> {
  const kinds = await kindsOf(target.ensembleId);
  const clash = (column: { name: string; kind: "energy" | "property" }) => {
    const before = kinds.get(column.name);
    return before === undefined ? null : kindClash(column.name, before, column.kind);
  };
  const { type, delimiter, header, rows, leftOut, match, questions, messages } = plan;
  return {
    file: name,
    ...{ type, delimiter, header, rows, leftOut, match, questions, messages },
    columns: plan.columns.map((column) => ({
      column: column.column,
      header: column.header,
      name: column.name,
      kind: column.kind,
      unit: column.unit,
      why: column.why,
      rule: column.rule ?? null,
      atom: column.atom ?? null,
      quantity: column.quantity ?? null,
      count: column.data.present.reduce((sum, flag) => sum + flag, 0),
      looksLikeEnergy: column.looksLikeEnergy ?? false,
      exists: kinds.has(column.name),
      conflict: clash(column),
    })),
  };
}

/** Refused names, before anything is written: all of them at once. */
async function refuseTaken(
  tx: Transaction,
  ensembleId: string,
  plan: FilePlan,
  fields: ColumnFields,
): Promise<void> {
  if (fields.replace === true) return;
  const names = await namesOf(ensembleId, tx);
  const taken = plan.columns.filter(({ name }) => names.has(name));
  if (taken.length === 0) return;
  const faults = taken.map(({ name }): Fault => {
    return { field: "replace", message: `"${name}" is the name of a column of this ensemble already.` };
  });
  const list = taken.slice(0, 5).map(({ name }) => `"${name}"`);
  const more = taken.length > 5 ? ` and ${taken.length - 5} more` : "";
  const detail = `${list.join(", ")}${more} ${taken.length === 1 ? "is the name of a column" : "are names of columns"} of this ensemble already. Give other names, or send replace=true to put the new numbers in their place.`;
  throw new DomainError("conflict", "The name is taken", detail, { faults });
}

async function storeAll(tx: Transaction, at: At, file: ReceivedFile, plan: FilePlan, frames: number) {
  const row = await lockEnsemble(tx, at);
  if (row.frames !== frames) {
    throw new DomainError(
      "conflict",
      "The ensemble changed",
      "Frames were added while the file was read. Nothing was stored; send it again.",
    );
  }
  await refuseTaken(tx, at.ensembleId, plan, file.fields);
  // A replacement that is sent again leaves what it made: no second entry, no sift of before.
  const standing = await standingColumns(tx, at.ensembleId, file.sha256, plan.columns);
  if (standing !== null) return { ids: standing, made: false };
  const [sourceId] = await file.store.publish(tx);
  const stored: { id: string; name: string; replaced: boolean }[] = [];
  for (const { column: _, header: __, why: ___, looksLikeEnergy: ____, ...column } of plan.columns) {
    const made = await storeColumn(tx, at, column, { replace: file.fields.replace });
    await tx
      .update(columns)
      .set({ sourceId: sourceId ?? null })
      .where(and(eq(columns.id, made.id), eq(columns.ensembleId, at.ensembleId)));
    stored.push(made);
  }
  if (stored.some(({ replaced }) => replaced)) await recomputeDerived(tx, at.ensembleId);
  await touchEnsemble(tx, at.ensembleId);
  await writeEntry(tx, at, at, {
    type: "columns-added",
    data: {
      from: file.name,
      sha256: file.sha256.toString("hex"),
      columns: plan.columns.map(({ name, kind, unit, data }, k) => ({
        id: stored[k]?.id ?? "",
        name,
        kind,
        unit,
        count: data.present.reduce((sum, flag) => sum + flag, 0),
        replaced: stored[k]?.replaced ?? false,
      })),
      matched: plan.match.text,
      answers: statedAnswers(file.fields),
    },
  });
  return { ids: stored.map(({ id }) => id), made: true };
}

/** The columns as they stand now, in the order of the ids. */
export async function listColumns(ensembleId: string, ids: readonly string[]): Promise<ListedColumn[]> {
  const found = await findColumns(ensembleId, await frameStrip(ensembleId));
  return ids.flatMap((id) => {
    const column = found.find((one) => one.id === id);
    if (column === undefined) return [];
    const { name, kind, unit, count, missing } = column;
    return [{ id, name, kind, unit, count, missing }];
  });
}

/**
 * Adds columns to an ensemble from a table or a second structure file: the file is kept, read with what was stated beside
 * it, matched with the frames, and either all of its columns are there or none. What is open is a question in a preview
 * and a refusal otherwise. A name in use is refused; with `replace` a file that is sent again changes nothing more.
 *
 * @throws DomainError invalid (422) for what is open or cannot be read, conflict (409) for names that are taken
 */
export async function addColumns(options: {
  actor: Actor;
  ensembleId: string;
  form: FormReader;
}): Promise<AddedColumns> {
  const { actor, ensembleId, form } = options;
  let at: At;
  try {
    at = await accessEnsemble(actor, "take-in", ensembleId);
  } catch (error) {
    await form.drain();
    throw error;
  }
  const file = await receiveFile(at.teamId, form);
  try {
    const target = await loadTarget(at);
    const plan = await planFile(file, target);
    if (file.fields.preview === true) {
      return { kind: "preview", preview: await previewOf(file.name, plan, target) };
    }
    if (plan.questions.length > 0) throw openPoints(file.name, plan.questions);
    if (plan.columns.length === 0) throw openPoints(file.name, [NOTHING_CHOSEN]);
    const { ids, made } = await inTransaction((tx) =>
      storeAll(tx, at, file, plan, target.strip.length),
    ).catch((error: unknown) => {
      if (!isDuplicate(error)) throw error;
      const message =
        "Somebody added a column of the same name at this moment. Nothing was stored; send it again.";
      throw new DomainError("conflict", "The name is taken", message);
    });
    if (made) await siftAfterLevels(at, ids);
    return { kind: "stored", columns: await listColumns(at.ensembleId, ids), messages: plan.messages };
  } finally {
    // What was published answers for its checksum and stays.
    await file.store.discard().catch((error) => log.warn({ err: error }, "file not taken back"));
  }
}

const NOTHING_CHOSEN: IntakeQuestion = {
  id: "columns",
  code: "C14",
  text: "Which columns are to be kept?",
  reason: "None of them is chosen.",
  options: [],
};
