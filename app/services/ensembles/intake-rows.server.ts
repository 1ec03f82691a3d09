import { createHash } from "node:crypto";
import { and, asc, count, desc, eq, inArray, isNull, ne, sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { columns, ensembles, frames, intakeMessages, questions } from "../../db/schema.server.ts";
import { perceiveChirality } from "../../lib/chem/chirality.ts";
import type { Configuration } from "../../lib/chem/stereo.ts";
import { packColumn } from "../../lib/column-data.ts";
import type { IntakeMessage, IntakeQuestion } from "../../lib/intake/report.ts";
import type { NewColumn } from "../../lib/intake/settle-energies.ts";
import type { Graph } from "../../lib/structure.ts";
import { acceptedFrames } from "./accepted-frames.server.ts";
import { loadPositions } from "./load-positions.server.ts";

/** The rows around an ensemble that intake, reading again and answers write alike. */

const cut = (text: string | undefined, length: number) =>
  text === undefined ? null : [...text].slice(0, length).join("");

/** Adds messages behind those that are there. */
export async function insertMessages(
  tx: Queryable,
  ensembleId: string,
  messages: readonly IntakeMessage[],
): Promise<void> {
  if (messages.length === 0) return;
  const rows = await tx
    .select({ last: sql<number | null>`max(${intakeMessages.position})` })
    .from(intakeMessages)
    .where(eq(intakeMessages.ensembleId, ensembleId));
  const first = (rows[0]?.last ?? -1) + 1;
  await tx.insert(intakeMessages).values(
    messages.map((message, at) => ({
      ensembleId,
      position: first + at,
      code: message.code,
      severity: message.severity,
      file: cut(message.file, 255) ?? "",
      line: message.line ?? null,
      column: message.column ?? null,
      frame: message.frame ?? null,
      atom: message.atom ?? null,
      found: cut(message.found, 400),
      message: cut(message.message, 1000) ?? "",
      hint: cut(message.hint, 500),
    })),
  );
}

/** Order in which questions stand: the unit belongs to a number, the level to both. */
const QUESTION_ORDER = ["energy-from", "energy-unit", "level"];

/** Writes open questions; one that stands open already is put anew with its options. */
export async function insertQuestions(
  tx: Queryable,
  ensembleId: string,
  asked: readonly IntakeQuestion[],
): Promise<void> {
  for (const question of asked) {
    const row = {
      position: QUESTION_ORDER.indexOf(question.id) + 1,
      code: question.code,
      text: question.text.slice(0, 500),
      reason: question.reason?.slice(0, 500) ?? null,
      options: question.options,
    };
    await tx
      .insert(questions)
      .values({ ensembleId, id: question.id, ...row })
      .onDuplicateKeyUpdate({ set: { ...row, answered: null, answeredBy: null, answeredAt: null } });
  }
}

/** Writes the columns that the files themselves hold. */
export async function insertColumns(
  tx: Queryable,
  ensembleId: string,
  made: readonly NewColumn[],
): Promise<void> {
  const next = { energy: 0, property: 0 };
  for (const { data, ...column } of made) {
    const packed = Buffer.from(packColumn(data));
    next[column.kind] += 1;
    await tx.insert(columns).values({
      ...column,
      id: newId(),
      ensembleId,
      ordinal: next[column.kind],
      data: packed,
      dataSha: createHash("sha256").update(packed).digest(),
      createdAt: new Date(),
    });
  }
}

/** Frames a statement that each bring a note of their own. */
const NOTES_AT_ONCE = 500;

/** Remarks on single frames, as their state and note say them; of several on one frame the first is its note. */
export async function remarkFrames(
  tx: Queryable,
  ensembleId: string,
  messages: readonly IntakeMessage[],
): Promise<void> {
  const notes = new Map<number, string>();
  for (const { frame, severity, message } of messages) {
    if (frame === undefined || severity !== "remark" || notes.has(frame)) continue;
    notes.set(frame, message.slice(0, 1000));
  }
  const all = [...notes];
  for (let at = 0; at < all.length; at += NOTES_AT_ONCE) {
    const some = all.slice(at, at + NOTES_AT_ONCE);
    const cases = some.map(([number, note]) => sql`when ${number} then ${note}`);
    const own = sql`case ${frames.number} ${sql.join(cases, sql` `)} end`;
    const numbers = some.map(([number]) => number);
    await tx
      .update(frames)
      .set({
        state: "remarked",
        // A frame that a person released goes on being told by it.
        readState: sql`if(${frames.readState} = 'held', 'held', 'remarked')`,
        note: sql`coalesce(${frames.note}, ${own})`,
      })
      .where(
        and(eq(frames.ensembleId, ensembleId), inArray(frames.number, numbers), ne(frames.state, "held")),
      );
  }
}

/** Holds every frame that could be used until the open questions are answered. */
export async function holdForAnswers(tx: Queryable, ensembleId: string): Promise<void> {
  await tx
    .update(frames)
    .set({ state: "held", holdReason: "waits-for-answer" })
    .where(and(eq(frames.ensembleId, ensembleId), ne(frames.state, "held")));
}

/** Releases what waited for an answer into the state that its reading gave it. */
export async function releaseAnswered(tx: Queryable, ensembleId: string): Promise<number> {
  const [outcome] = await tx
    .update(frames)
    .set({ state: sql`${frames.readState}`, holdReason: null })
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.holdReason, "waits-for-answer")));
  return outcome.affectedRows;
}

export interface Counts {
  frames: number;
  accepted: number;
  remarked: number;
  held: number;
}

/** Counts of the frames as their rows stand. */
export async function countFrames(tx: Queryable, ensembleId: string): Promise<Counts> {
  const rows = await tx
    .select({ state: frames.state, n: count() })
    .from(frames)
    .where(eq(frames.ensembleId, ensembleId))
    .groupBy(frames.state);
  const of = (state: string) => rows.find((row) => row.state === state)?.n ?? 0;
  const [plain, remarked, held] = [of("accepted"), of("remarked"), of("held")];
  return { frames: plain + remarked + held, accepted: plain + remarked, remarked, held };
}

/** The frame with the lowest energy among the accepted; the first one without energies; null where none is. */
async function lowestFrame(
  tx: Queryable,
  ensembleId: string,
  energies: Pick<NewColumn, "data"> | null,
): Promise<number | null> {
  const { numbers, indices } = await acceptedFrames(ensembleId, tx);
  let best: { index: number; value: number } | null = null;
  for (const [row, number] of numbers.entries()) {
    const has = energies?.data.present[number - 1] === 1;
    const value = has ? (energies?.data.values[number - 1] ?? 0) : Number.POSITIVE_INFINITY;
    if (best === null || value < best.value) best = { index: indices[row] ?? 0, value };
  }
  return best?.index ?? null;
}

/** Chirality by the configuration of the group, as the lowest frame shows it. */
export async function chiralityOf(
  tx: Queryable,
  ensembleId: string,
  graph: Graph,
  configuration: Configuration,
  energies: Pick<NewColumn, "data"> | null,
): Promise<{ chirality: "achiral" | "chiral" | "unsure"; chiralityNote: string }> {
  const lowest = await lowestFrame(tx, ensembleId, energies);
  const positions =
    lowest === null ? undefined : await loadPositions(ensembleId, graph.elements.length, [lowest], tx);
  const { chirality, note } = perceiveChirality(graph, configuration, positions && { positions });
  return { chirality, chiralityNote: note.slice(0, 500) };
}

/**
 * Names of the levels that a team uses, the commonest first.
 *
 * @param except an ensemble that is being read again: its own names are no others'
 */
export async function levelsInUse(teamId: string, except: string | null = null): Promise<string[]> {
  const rows = await db
    .select({ name: columns.name, n: count() })
    .from(columns)
    .innerJoin(ensembles, eq(ensembles.id, columns.ensembleId))
    .where(
      and(
        eq(ensembles.teamId, teamId),
        isNull(ensembles.deletedAt),
        eq(columns.kind, "energy"),
        except === null ? undefined : ne(ensembles.id, except),
      ),
    )
    .groupBy(columns.name)
    .orderBy(desc(count()), asc(columns.name))
    .limit(6);
  return rows.map((row) => row.name);
}
