import { and, count, desc, eq, inArray, isNull, ne, sql } from "drizzle-orm";
import { db, inTransaction, type Transaction } from "../../db/client.server.ts";
import { ensembles, frames, intakeMessages, logbook, questions } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { HOLD, isEnsembleAsk } from "../../lib/intake/reading-choices.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import { whyNotReleased } from "../../lib/intake/release.ts";
import type { FrameState } from "../../lib/intake/report.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { acceptedSha } from "./accepted-frames.server.ts";
import { countFrames } from "./intake-rows.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { refreshChirality } from "./refresh-chirality.server.ts";

/** How a question was answered that has no other option than to hold: frame by frame. */
const RELEASED = "released";

type At = Grant & { ensembleId: string };

interface Decision {
  actor: Actor;
  ensembleId: string;
  /** From 1. */
  frame: number;
  reason: string;
}

/** Ensemble first, frame second, always in this order: two people at once wait for each other and never deadlock. */
async function lock(tx: Transaction, at: At, number: number) {
  const rows = await tx
    .select({ version: ensembles.version })
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)))
    .for("update");
  const found = await tx
    .select()
    .from(frames)
    .where(and(eq(frames.ensembleId, at.ensembleId), eq(frames.number, number)))
    .for("update");
  const [ensemble, frame] = [rows[0], found[0]];
  if (ensemble === undefined || frame === undefined) throw notFound();
  return { version: ensemble.version, frame };
}

async function write(
  tx: Transaction,
  at: At,
  number: number,
  change: { state: FrameState; holdReason: string | null; note: string | null },
  version: number,
): Promise<void> {
  await tx
    .update(frames)
    .set({ ...change, note: change.note?.slice(0, 1000) ?? null })
    .where(and(eq(frames.ensembleId, at.ensembleId), eq(frames.number, number)));
  await tx
    .update(ensembles)
    .set({
      ...(await countFrames(tx, at.ensembleId)),
      acceptedSha: await acceptedSha(tx, at.ensembleId),
      version: version + 1,
      changedAt: new Date(),
    })
    .where(eq(ensembles.id, at.ensembleId));
  await refreshChirality(tx, at.ensembleId);
}

const conflict = (title: string, detail: string) => new DomainError("conflict", title, detail);

/** True where the last that people decided about a frame is this release: the call came twice. */
async function releasedBefore(tx: Transaction, at: At, number: number, reason: string): Promise<boolean> {
  const [last] = await tx
    .select({ type: logbook.type, reason: sql<string>`json_value(${logbook.data}, '$.reason')` })
    .from(logbook)
    .where(
      and(
        eq(logbook.ensembleId, at.ensembleId),
        inArray(logbook.type, ["hold", "release"]),
        sql`json_value(${logbook.data}, '$.frame') = ${number}`,
      ),
    )
    .orderBy(desc(logbook.id))
    .limit(1);
  return last?.type === "release" && last.reason === reason;
}

/**
 * Holds a frame: it is kept and left out of every computation from now on. The same hold a second time changes nothing.
 *
 * @throws DomainError conflict where it is held already for another reason
 */
export async function holdFrame({ actor, ensembleId, frame: number, reason }: Decision): Promise<FrameState> {
  const at = await accessEnsemble(actor, "compute", ensembleId);
  await inTransaction(async (tx) => {
    const { version, frame } = await lock(tx, at, number);
    if (frame.state === "held") {
      if (frame.holdReason === "by-hand" && frame.note === reason) return;
      throw conflict("Held already", `Frame ${number} is held already: ${frame.note ?? frame.holdReason}`);
    }
    await write(tx, at, number, { state: "held", holdReason: "by-hand", note: reason }, version);
    await writeEntry(tx, at, at, { type: "hold", data: { frame: number, reason } });
  });
  return "held";
}

/** The words that came with the frame, where its remark is among those that are listed. */
async function remarkOf(tx: Transaction, at: At, number: number): Promise<string | null> {
  const rows = await tx
    .select({ message: intakeMessages.message })
    .from(intakeMessages)
    .where(
      and(
        eq(intakeMessages.ensembleId, at.ensembleId),
        eq(intakeMessages.frame, number),
        eq(intakeMessages.severity, "remark"),
      ),
    )
    .limit(1);
  return rows[0]?.message ?? null;
}

/**
 * A frame that is released while it waits is settled: it goes on being read as proposed. Once none waits, what was asked
 * of the reading is answered by that.
 */
async function settleWaiting(tx: Transaction, at: At, number: number): Promise<void> {
  await tx
    .update(frames)
    .set({ readState: "held" })
    .where(and(eq(frames.ensembleId, at.ensembleId), eq(frames.number, number)));
  await tx
    .delete(intakeMessages)
    .where(
      and(
        eq(intakeMessages.ensembleId, at.ensembleId),
        eq(intakeMessages.frame, number),
        eq(intakeMessages.severity, "question"),
      ),
    );
  const [waiting] = await tx
    .select({ n: count() })
    .from(frames)
    .where(
      and(
        eq(frames.ensembleId, at.ensembleId),
        eq(frames.holdReason, "waits-for-answer"),
        ne(frames.number, number),
      ),
    );
  if ((waiting?.n ?? 0) > 0) return;
  const open = (await findQuestions(at.ensembleId, tx)).filter(({ answered }) => answered === undefined);
  const settled = open.filter(({ id }) => {
    const asked = readAskId(id)?.ask;
    return asked !== undefined && !isEnsembleAsk(asked);
  });
  for (const question of settled) {
    const ways = question.options.filter(({ id }) => id !== HOLD);
    const option = (ways.find(({ proposed }) => proposed) ?? ways[0])?.id ?? RELEASED;
    await tx
      .update(questions)
      .set({ answered: option, answeredBy: at.userId, answeredAt: new Date() })
      .where(and(eq(questions.ensembleId, at.ensembleId), eq(questions.id, question.id)));
  }
  await tx
    .update(ensembles)
    .set({ openQuestions: open.length - settled.length })
    .where(eq(ensembles.id, at.ensembleId));
}

/**
 * Releases a held frame: it takes part again. Another species or configuration, and what cannot be read, stay held.
 * The same release a second time changes nothing.
 *
 * @throws DomainError conflict where it is not held, or may not be released; the refusal stands in the logbook
 */
export async function releaseFrame({
  actor,
  ensembleId,
  frame: number,
  reason,
}: Decision): Promise<FrameState> {
  const at = await accessEnsemble(actor, "compute", ensembleId);
  const outcome = await inTransaction(async (tx) => {
    const { version, frame } = await lock(tx, at, number);
    if (frame.state !== "held") {
      if (await releasedBefore(tx, at, number, reason)) return { state: frame.state };
      throw conflict("Not held", `Frame ${number} is not held.`);
    }
    const why = whyNotReleased(frame.holdReason);
    if (why !== null) return { refused: why };
    // What only its reader held comes back with a remark: somebody decided against it.
    const state = frame.readState === "held" ? "remarked" : frame.readState;
    const waited = frame.holdReason === "waits-for-answer";
    const note = frame.readState === "accepted" ? null : await remarkOf(tx, at, number);
    await write(
      tx,
      at,
      number,
      waited
        ? { state: "remarked", holdReason: null, note: reason }
        : { state, holdReason: null, note: note ?? (state === "remarked" ? reason : null) },
      version,
    );
    const heldFor = frame.holdReason ?? "";
    if (heldFor === "waits-for-answer") await settleWaiting(tx, at, number);
    await writeEntry(tx, at, at, { type: "release", data: { frame: number, reason, heldFor } });
    return { state: waited ? ("remarked" as const) : state };
  });
  if (outcome.state) return outcome.state;
  const why = outcome.refused ?? "";
  await writeEntry(db, at, at, { type: "release-refused", data: { frame: number, reason, why } });
  throw conflict("It stays held", `Frame ${number} cannot be released: ${why}`);
}
