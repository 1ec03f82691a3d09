import { Readable } from "node:stream";
import { and, asc, eq, isNull, sql } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { columns, ensembleFiles, ensembles, frames, logbook, series } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { uploadFieldsSchema } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import { isEnsembleAsk } from "../../lib/intake/reading-choices.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import { canBeSplitOff, splitName, splitWords } from "../../lib/intake/split-name.ts";
import { splitFrames } from "../../lib/logbook/entries.ts";
import { FrameCutter, type FramePlace } from "../../lib/text/cut-frames.ts";
import { type Actor, accessEnsemble, accessTeam, type Grant } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { answerQuestions } from "./answer-questions.server.ts";
import type { TakenIn } from "./finish-upload.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { openFile } from "./open-file.server.ts";
import type { FormPart, FormReader } from "./read-multipart.server.ts";
import { readSource } from "./source-writer.server.ts";
import { takeInFor } from "./take-in.server.ts";
import { unpackEntry } from "./zip-archive.server.ts";

type At = Grant & { ensembleId: string };

/** Frames that the logbook names; all are counted. */
const NAMED_FRAMES = 500;

interface HeldFrame {
  number: number;
  file: number;
  line: number;
}

interface Parent {
  name: string;
  series: string;
  note: string | null;
  held: HeldFrame[];
}

/** The held frames that say the same of themselves as this one, and what they were held in. */
async function findHeld(at: At, number: number): Promise<Parent> {
  const [parent] = await db
    .select({ name: ensembles.name, series: series.name })
    .from(ensembles)
    .innerJoin(series, eq(series.id, ensembles.seriesId))
    .where(
      and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)),
    );
  const [frame] = await db
    .select()
    .from(frames)
    .where(and(eq(frames.ensembleId, at.ensembleId), eq(frames.number, number)));
  if (parent === undefined || frame === undefined) throw notFound();
  if (frame.state !== "held" || !canBeSplitOff(frame.holdReason) || frame.shape === null) {
    throw new DomainError(
      "conflict",
      "No ensemble of its own",
      `Frame ${number} is not held as another species, molecule or configuration: only such frames make an ensemble of their own.`,
    );
  }
  const held = await db
    .select({ number: frames.number, file: frames.file, line: frames.line })
    .from(frames)
    .where(
      and(
        eq(frames.ensembleId, at.ensembleId),
        eq(frames.state, "held"),
        eq(frames.holdReason, frame.holdReason ?? ""),
        eq(frames.shape, frame.shape),
        frame.note === null ? isNull(frames.note) : eq(frames.note, frame.note),
      ),
    )
    .orderBy(asc(frames.number));
  return { ...parent, note: frame.note, held };
}

/** Where the frames of one file stand in it: each reaches to the line of the frame behind it. */
async function placesIn(at: At, file: number, held: readonly HeldFrame[]): Promise<FramePlace[]> {
  const all = await db
    .select({ number: frames.number, line: frames.line })
    .from(frames)
    .where(and(eq(frames.ensembleId, at.ensembleId), eq(frames.file, file)))
    .orderBy(asc(frames.number));
  const wanted = new Set(held.map(({ number }) => number));
  return all.flatMap(({ number, line }, k) =>
    wanted.has(number) ? [{ line, next: all[k + 1]?.line ?? null }] : [],
  );
}

/** The kept bytes of the frames, as they stand in their file. */
async function* cut(
  file: { name: string; entry: string | null; format: string; sourceId: string },
  places: readonly FramePlace[],
): AsyncGenerator<Buffer, void, undefined> {
  const cutter = new FrameCutter({ file: file.name, records: file.format.startsWith("SDF"), places });
  const source = readSource(file.sourceId);
  const options = { file: file.name, limit: env().MAX_FILE_BYTES, remark: () => {} };
  const plain =
    file.entry === null
      ? (await openFile(source, options)).bytes
      : unpackEntry(source, file.name, file.entry);
  for await (const bytes of plain) {
    const found = cutter.push(bytes);
    if (found.length > 0) yield Buffer.concat(found);
    if (cutter.done) return;
  }
  const rest = cutter.end();
  if (rest.length > 0) yield Buffer.concat(rest);
}

/** "night-run.xyz.gz" and frames of another composition: "night-run, C4H10.xyz". The logbook names the frames. */
function fileName(file: { name: string; entry: string | null; format: string }, note: string | null): string {
  const name = file.entry ?? file.name;
  const stem = name.replace(/(\.(xyz|extxyz|txt|sdf|sd|mol))?(\.gz)?$/i, "") || name;
  const ending = file.format.startsWith("SDF") ? "sdf" : "xyz";
  const words = splitWords(note).replace(/[/\\:]+\s*/g, " ");
  return `${stem.slice(0, 120)}, ${words.slice(0, 100)}.${ending}`;
}

async function* parts(
  at: At,
  parent: Parent,
  fields: Record<string, string>,
): AsyncGenerator<FormPart, void, undefined> {
  for (const [name, value] of Object.entries(fields)) yield { kind: "field", name, value };
  const files = await db
    .select()
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, at.ensembleId))
    .orderBy(asc(ensembleFiles.position));
  for (const file of files) {
    const held = parent.held.filter((frame) => frame.file === file.position);
    if (held.length === 0) continue;
    const places = await placesIn(at, file.position, held);
    const data = Readable.from(cut(file, places));
    yield { kind: "file", name: "file", filename: fileName(file, parent.note), data };
  }
}

/** Number, unit and level as the parent's energies have them, where a request could name them so. */
async function energiesOf(at: At): Promise<Record<string, string>> {
  const [level] = await db
    .select()
    .from(columns)
    .where(
      and(
        eq(columns.ensembleId, at.ensembleId),
        eq(columns.kind, "energy"),
        sql`${columns.origin} regexp '^(key|number|field):'`,
      ),
    )
    .orderBy(asc(columns.ordinal))
    .limit(1);
  if (!level?.origin || level.unit === null) return {};
  const fields: Record<string, string> = {
    energyFrom: level.origin,
    energyUnit: level.unit,
    level: level.name,
    ...(level.energyKind === null ? {} : { energyKind: level.energyKind }),
    ...(level.temperature === null ? {} : { energyTemperature: String(level.temperature) }),
  };
  return uploadFieldsSchema.safeParse(fields).success ? fields : {};
}

/** Takes the frames in; where theirs are not the parent's energies, the person is asked as of any file. */
async function takeFrames(actor: Actor, at: At, parent: Parent, name: string): Promise<TakenIn> {
  const grant = await accessTeam(actor, "take-in", at.teamId);
  const take = (energies: Record<string, string>) => {
    const form: FormReader = {
      parts: () => parts(at, parent, { name, series: parent.series, ...energies }),
      drain: async () => {},
    };
    return takeInFor({ grantOf: async () => grant, form, interactive: true });
  };
  try {
    return await take(await energiesOf(at));
  } catch (error) {
    if (!(error instanceof DomainError)) throw error;
    // Read again with other answers since: it is the same ensemble all the same.
    const { existing } = error.extra;
    if (error.code === "conflict" && typeof existing === "string") {
      return { ensembleId: existing, teamId: at.teamId, created: false };
    }
    if (error.code !== "invalid") throw error;
    return take({});
  }
}

export interface SplitOff {
  ensembleId: string;
  name: string;
  frames: number;
  /** False where these frames made one before. */
  created: boolean;
}

/**
 * Makes an ensemble of the held frames that are the same other species, molecule or configuration as the one named:
 * their bytes are cut out of the kept files and go the way of any upload. In the parent they stay held. The same frames
 * again give the same ensemble.
 *
 * @throws DomainError conflict where the frame is not held for such a reason, and what taking in throws
 */
export async function splitOff(options: {
  actor: Actor;
  ensembleId: string;
  frame: number;
}): Promise<SplitOff> {
  const at = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const parent = await findHeld(at, options.frame);
  const name = splitName(parent.name, parent.note);
  const taken = await takeFrames(options.actor, at, parent, name);
  const count = parent.held.length;
  if (!taken.created) {
    const [made] = await db
      .select({ name: ensembles.name })
      .from(ensembles)
      .where(eq(ensembles.id, taken.ensembleId));
    return { ensembleId: taken.ensembleId, name: made?.name ?? name, frames: count, created: false };
  }
  const named = parent.held.slice(0, NAMED_FRAMES).map(({ number }) => number);
  await inTransaction(async (tx) => {
    await writeEntry(tx, at, at, {
      type: "split-off",
      data: { ensembleId: taken.ensembleId, name, frames: named, count },
    });
    await writeEntry(tx, { teamId: at.teamId, ensembleId: taken.ensembleId }, at, {
      type: "split-from",
      data: { ensembleId: at.ensembleId, name: parent.name, frames: named, count },
    });
  });
  await closeChoices(options.actor, at);
  return { ensembleId: taken.ensembleId, name, frames: count, created: true };
}

/** Where every other molecule, or configuration, became an ensemble of its own, the one that was taken is the answer. */
async function closeChoices(actor: Actor, at: At): Promise<void> {
  const open = (await findQuestions(at.ensembleId)).filter(
    ({ id, answered }) => answered === undefined && isEnsembleAsk(readAskId(id)?.ask),
  );
  if (open.length === 0) return;
  const entries = await db
    .select({ data: logbook.data })
    .from(logbook)
    .where(and(eq(logbook.ensembleId, at.ensembleId), eq(logbook.type, "split-off")));
  const made = new Set(
    entries
      .flatMap(({ data }) => splitFrames.safeParse(data).data?.frames ?? [])
      .map((frame) => `frame:${frame}`),
  );
  const answers = open.flatMap(({ id, options }) => {
    const taken = options.find(({ proposed }) => proposed);
    const all = options.every((option) => option === taken || made.has(option.id));
    return taken && all ? [{ id, option: taken.id }] : [];
  });
  if (answers.length > 0) await answerQuestions({ actor, ensembleId: at.ensembleId, answers });
}
