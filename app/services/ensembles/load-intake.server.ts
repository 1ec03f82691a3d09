import { and, asc, eq, inArray, isNull, sql } from "drizzle-orm";
import { z } from "zod";
import { db, type Queryable } from "../../db/client.server.ts";
import { columns, ensembles, frames, intakeMessages, logbook, questions } from "../../db/schema.server.ts";
import { whyNotReleased } from "../../lib/intake/release.ts";
import type { HoldReason, IntakeMessage, IntakeQuestion, QuestionOption } from "../../lib/intake/report.ts";
import { splitFrames } from "../../lib/logbook/entries.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import type { EnergiesInForce, FrameView, IntakeView } from "../../lib/views.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { numbersOfFiles } from "./numbers-of-files.server.ts";

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
    label: row.label === null ? null : escapeControls(row.label),
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

/** Levels that the files hold themselves, and how they are read. */
async function energiesInForce(ensembleId: string): Promise<EnergiesInForce[]> {
  const rows = await db
    .select({
      level: columns.name,
      from: columns.origin,
      unit: columns.unit,
      kind: columns.energyKind,
      kindStated: columns.kindStated,
      temperature: columns.temperature,
    })
    .from(columns)
    .where(
      and(
        eq(columns.ensembleId, ensembleId),
        eq(columns.kind, "energy"),
        sql`${columns.origin} regexp '^(key|number|field):'`,
      ),
    )
    .orderBy(asc(columns.ordinal));
  return rows.map(({ from, unit, kind, ...row }) => ({
    ...row,
    from: from ?? "",
    unit: unit ?? "",
    kind: kind ?? "electronic",
  }));
}

/** What held frames were made into; a guest of one ensemble sees no other. */
async function findBecame(grant: Grant, ensembleId: string): Promise<IntakeView["became"]> {
  if (grant.role === "guest" || grant.onlyOwnOfToken !== null) return [];
  const entries = await db
    .select({ data: logbook.data })
    .from(logbook)
    .where(and(eq(logbook.ensembleId, ensembleId), eq(logbook.type, "split-off")));
  const made = entries.flatMap(({ data }) => {
    const read = splitFrames.safeParse(data);
    return read.success ? [read.data] : [];
  });
  if (made.length === 0) return [];
  const living = await db
    .select({ id: ensembles.id, name: ensembles.name })
    .from(ensembles)
    .where(
      and(
        eq(ensembles.teamId, grant.teamId),
        isNull(ensembles.deletedAt),
        inArray(
          ensembles.id,
          made.map((one) => one.ensembleId),
        ),
      ),
    );
  return living.map(({ id, name }) => ({
    ensembleId: id,
    name: escapeControls(name),
    frames: made.filter((one) => one.ensembleId === id).flatMap((one) => one.frames),
  }));
}

/** The intake report of an ensemble. */
export async function loadIntake(options: { actor: Actor; ensembleId: string }): Promise<IntakeView> {
  const grant = await accessEnsemble(options.actor, "read", options.ensembleId);
  const { ensembleId } = grant;
  const [strip, held, remarked, messages, asked, own, inForce, became, numbers] = await Promise.all([
    intakeStrip(ensembleId),
    findFrames(ensembleId, "held"),
    findFrames(ensembleId, "remarked"),
    findMessages(ensembleId),
    findQuestions(ensembleId),
    db.select({ answers: ensembles.answers }).from(ensembles).where(eq(ensembles.id, ensembleId)),
    energiesInForce(ensembleId),
    findBecame(grant, ensembleId),
    numbersOfFiles(ensembleId),
  ]);
  const waiting = strip.split("w").length - 1;
  const answered = asked.find(({ code }) => code === "energy-from")?.answered;
  const energyFrom = answered ?? own[0]?.answers.energyFrom ?? null;
  return { strip, held, remarked, waiting, messages, questions: asked, energyFrom, numbers, inForce, became };
}
