import { and, asc, eq, sql } from "drizzle-orm";
import { z } from "zod";
import { db, type Queryable } from "../../db/client.server.ts";
import { ensembles, frames, intakeMessages, questions } from "../../db/schema.server.ts";
import { whyNotReleased } from "../../lib/intake/release.ts";
import type { HoldReason, IntakeMessage, IntakeQuestion, QuestionOption } from "../../lib/intake/report.ts";
import type { FrameView, IntakeView } from "../../lib/views.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";

/** Frames of one state that the page lists; the strip shows all. */
const LISTED = 500;

const optionsSchema: z.ZodType<QuestionOption[]> = z.array(
  z.object({
    id: z.string(),
    text: z.string(),
    detail: z.string().optional(),
    values: z.array(z.string().nullable()).optional(),
    spreadKcal: z.number().nullable().optional(),
    spread: z.number().nullable().optional(),
    proposed: z.boolean().optional(),
  }),
);

/** What intake said of the files, in the order it was said. */
export async function findMessages(ensembleId: string): Promise<IntakeMessage[]> {
  const rows = await db
    .select()
    .from(intakeMessages)
    .where(eq(intakeMessages.ensembleId, ensembleId))
    .orderBy(asc(intakeMessages.position));
  return rows.map((row) => ({
    code: row.code,
    severity: row.severity,
    file: row.file,
    ...(row.line === null ? {} : { line: row.line }),
    ...(row.column === null ? {} : { column: row.column }),
    ...(row.frame === null ? {} : { frame: row.frame }),
    ...(row.atom === null ? {} : { atom: row.atom }),
    ...(row.found === null ? {} : { found: row.found }),
    message: row.message,
    ...(row.hint === null ? {} : { hint: row.hint }),
  }));
}

/** All questions of an ensemble, answered ones too, in the order they were asked. */
export async function findQuestions(ensembleId: string, on: Queryable = db): Promise<IntakeQuestion[]> {
  const rows = await on
    .select()
    .from(questions)
    .where(eq(questions.ensembleId, ensembleId))
    .orderBy(asc(questions.position));
  return rows.map((row) => ({
    id: row.id,
    code: row.code,
    text: row.text,
    ...(row.reason === null ? {} : { reason: row.reason }),
    options: optionsSchema.parse(row.options),
    ...(row.answered === null ? {} : { answered: row.answered }),
  }));
}

async function findFrames(ensembleId: string, state: "held" | "remarked"): Promise<FrameView[]> {
  const rows = await db
    .select()
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.state, state)))
    .orderBy(asc(frames.number))
    .limit(LISTED);
  return rows.map((row) => ({
    number: row.number,
    file: row.file,
    line: row.line,
    label: row.label,
    state: row.state,
    holdReason: row.holdReason,
    note: row.note,
    releasable: row.state === "held" && whyNotReleased(row.holdReason) === null,
    showable: row.shape === 0,
  }));
}

/** The frames in file order, those that wait for an answer told apart from the held ones. */
async function intakeStrip(ensembleId: string): Promise<string> {
  const waits: HoldReason = "waits-for-answer";
  const mark = sql`case when ${frames.state} = 'held' and ${frames.holdReason} = ${waits} then 'w' else left(${frames.state}, 1) end`;
  const rows = await db
    .select({ text: sql<string | null>`group_concat(${mark} order by ${frames.number} separator '')` })
    .from(frames)
    .where(eq(frames.ensembleId, ensembleId));
  return rows[0]?.text ?? "";
}

/** The intake report of an ensemble. */
export async function loadIntake(options: { actor: Actor; ensembleId: string }): Promise<IntakeView> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const [strip, held, remarked, messages, asked, own] = await Promise.all([
    intakeStrip(ensembleId),
    findFrames(ensembleId, "held"),
    findFrames(ensembleId, "remarked"),
    findMessages(ensembleId),
    findQuestions(ensembleId),
    db.select({ answers: ensembles.answers }).from(ensembles).where(eq(ensembles.id, ensembleId)),
  ]);
  const waiting = strip.split("w").length - 1;
  const answered = asked.find(({ code }) => code === "energy-from")?.answered;
  const energyFrom = answered ?? own[0]?.answers.energyFrom ?? null;
  return { strip, held, remarked, waiting, messages, questions: asked, energyFrom };
}
