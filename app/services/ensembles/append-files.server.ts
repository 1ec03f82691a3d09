import { and, eq, isNull } from "drizzle-orm";
import { db, inTransaction, type Transaction } from "../../db/client.server.ts";
import { batches, ensembles } from "../../db/schema.server.ts";
import { type BatchFields, batchFieldsSchema } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { recomputeComputed } from "../columns/recompute-computed.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { tellOfIntake } from "../mail/long-work.server.ts";
import { acceptedSha } from "./accepted-frames.server.ts";
import { type BatchPlace, countFiles, optionsAt } from "./batch-place.server.ts";
import { checkSameBatch, ensureFirstBatch, findSameBatch } from "./batches.server.ts";
import { type CompletedBatch, completeBatch, numberOf, ownLevel } from "./complete-batch.server.ts";
import { bondTableOf, type WrittenAnswers } from "./complete-reading.server.ts";
import type { FramesTold } from "./frames-read.server.ts";
import { countFrames } from "./intake-rows.server.ts";
import { findQuestions } from "./load-intake.server.ts";
import { mergeBatch } from "./merge-batch.server.ts";
import type { FormReader } from "./read-multipart.server.ts";
import { type EndedReading, readStored, type StoredFile, sourcesOf, takeBack } from "./read-stored.server.ts";
import { filesSha } from "./same-files.server.ts";
import { siftAfterIntake } from "./sift-after-intake.server.ts";
import { pointFiles } from "./store-files.server.ts";
import { Upload } from "./upload.server.ts";
import { FormFields, invalidField } from "./upload-fields.ts";

type At = Grant & { ensembleId: string };
type EnsembleRow = typeof ensembles.$inferSelect;

/** Two batches at once: whoever is later reads its kept files again behind the other. More tries than these are no race. */
const TRIES = 5;

async function findRow(at: At): Promise<EnsembleRow> {
  const rows = await db
    .select()
    .from(ensembles)
    .where(
      and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)),
    );
  const row = rows[0];
  if (row === undefined) throw notFound();
  return row;
}

function writtenOf(fields: BatchFields): WrittenAnswers {
  return {
    energyUnit: fields.energyUnit ?? null,
    energyFrom: fields.energyFrom ?? null,
    level: fields.level ?? null,
    energyKind: fields.energyKind ?? "electronic",
    energyTemperature: fields.energyTemperature ?? null,
    ...(fields.energyKind === undefined ? {} : { kindStated: true }),
  };
}

function questionsFirst(): DomainError {
  return new DomainError(
    "conflict",
    "Questions are open",
    "Intake of this ensemble asked for the number, unit or level of its energies. Answer that first, then add the batch.",
  );
}

async function findPlace(at: At): Promise<BatchPlace> {
  const ensemble = await findRow(at);
  if (ensemble.openQuestions > 0 && ensemble.accepted === 0) throw questionsFirst();
  return { ensemble, ...(await countFiles(at.ensembleId)) };
}

/** The ensemble took in something else meanwhile. */
class Moved extends Error {}

interface Joining {
  at: At;
  place: BatchPlace;
  ended: EndedReading;
  done: CompletedBatch;
  upload: Upload;
  written: WrittenAnswers;
  name: string | null;
  sha: Buffer;
}

async function join(tx: Transaction, joining: Joining): Promise<{ joined: boolean }> {
  const { at, place, ended, done, upload, written, sha } = joining;
  const { ensemble } = place;
  const [row] = await tx
    .select()
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)))
    .for("update");
  if (row === undefined) throw notFound();
  const same = await findSameBatch(tx, at.ensembleId, sha);
  if (same) {
    checkSameBatch(at.ensembleId, same, written);
    return { joined: false };
  }
  const unmoved =
    row.frames === ensemble.frames &&
    row.bonds.equals(ensemble.bonds) &&
    row.elements.equals(ensemble.elements);
  if (!unmoved) throw new Moved();
  const { reading, result } = ended;
  await ensureFirstBatch(tx, row);
  await pointFiles(tx, reading.ensembleId, await upload.publish(tx), place.files);
  await mergeBatch(tx, row, { ensembleId: reading.ensembleId, result, columns: done.columns });
  await tx.insert(batches).values({
    ensembleId: at.ensembleId,
    batch: place.batch,
    filesSha: sha,
    answers: written,
    name: joining.name,
    createdBy: at.userId,
    createdByToken: at.tokenId,
    createdAt: new Date(),
  });
  const counts = await countFrames(tx, at.ensembleId);
  await tx
    .update(ensembles)
    .set({
      ...counts,
      openQuestions: (await findQuestions(at.ensembleId, tx)).filter(({ answered }) => answered === undefined)
        .length,
      bondTable: row.bondTable ?? bondTableOf(result),
      acceptedSha: await acceptedSha(tx, at.ensembleId),
      version: row.version + 1,
      changedAt: new Date(),
    })
    .where(eq(ensembles.id, at.ensembleId));
  await recomputeComputed(tx, at.ensembleId);
  await writeEntry(tx, at, at, {
    type: "batch",
    data: {
      batch: place.batch + 1,
      name: joining.name,
      files: upload.store.written.map((file, k) => ({
        name: upload.names[k] ?? "",
        sha256: file.sha256.toString("hex"),
        bytes: file.bytes,
      })),
      answers: { energyUnit: written.energyUnit, energyFrom: written.energyFrom, level: written.level },
      added: {
        frames: counts.frames - row.frames,
        accepted: counts.accepted - row.accepted,
        remarked: counts.remarked - row.remarked,
        held: counts.held - row.held,
      },
    },
  });
  return { joined: true };
}

export interface Appended {
  ensembleId: string;
  teamId: string;
  /** False where the same files were added before. */
  added: boolean;
}

async function finish(at: At, upload: Upload, first: BatchPlace, fields: BatchFields): Promise<Appended> {
  const written = writtenOf(fields);
  const answer = { ensembleId: at.ensembleId, teamId: at.teamId };
  const sha = filesSha(upload.store.written.map((file) => file.sha256));
  const same = await findSameBatch(db, at.ensembleId, sha);
  if (same) {
    checkSameBatch(at.ensembleId, same, written);
    return { ...answer, added: false };
  }
  const kept: StoredFile[] = upload.kept();
  const { reading } = upload;
  let ended: EndedReading = { reading, result: await reading.end() };
  let place = first;
  for (let attempt = 1; ; attempt++) {
    try {
      const done = await completeBatch(ended.reading, ended.result, place.ensemble, {
        stated: written,
        kindStated: fields.energyKind !== undefined,
        sources: sourcesOf(ended.reading, kept),
        batch: place.batch,
      });
      const joining = { at, place, ended, done, upload, written, name: fields.name ?? null, sha };
      const { joined } = await inTransaction((tx) => join(tx, joining), { isolation: "read committed" });
      if (joined) await siftAfterIntake(at);
      return { ...answer, added: joined };
    } catch (error) {
      if (!(error instanceof Moved) || attempt >= TRIES) throw error;
      // Somebody added frames in between: these are numbered on behind them.
      await takeBack(ended.reading);
      place = await findPlace(at);
      ended = await readStored(at, kept, optionsAt(place, ended.reading.options.energyFrom));
      upload.reading = ended.reading;
    }
  }
}

/**
 * Adds a second search or a further batch of the same molecule to an ensemble: frames are numbered on, compared with the
 * ensemble's molecule, and nothing of them is visible before the last act. Number, unit and level of the energies are
 * those of the ensemble where the files are alike and nothing else is said.
 *
 * @throws DomainError conflict while questions are open, or for the same files with other answers; invalid where the
 *   energies stay unclear
 */
export async function appendFiles(options: {
  actor: Actor;
  ensembleId: string;
  form: FormReader;
  /** Told of the frames read so far. */
  told?: FramesTold;
}): Promise<Appended> {
  const { form } = options;
  const fields = new FormFields(batchFieldsSchema);
  let upload: Upload | null = null;
  let place: BatchPlace | null = null;
  let at: At | null = null;
  const began = Date.now();
  try {
    at = await accessEnsemble(options.actor, "take-in", options.ensembleId);
    for await (const part of form.parts()) {
      if (part.kind === "field") {
        fields.add(part.name, part.value);
        continue;
      }
      if (part.name !== "file")
        throw invalidField(part.name, `There is no field "${part.name}". Files go into "file".`);
      if (upload === null || place === null) {
        place = await findPlace(at);
        const level = await ownLevel(place.ensemble, fields.get("level"));
        const reading = optionsAt(place, numberOf(fields.get("energyFrom"), level));
        upload = new Upload(at, { ...reading, told: options.told });
        await upload.begin();
      }
      await upload.readFile(part);
    }
    const checked = fields.check();
    if (upload === null || place === null)
      throw invalidField("file", 'No file came. Send it in the field "file".');
    const done = await finish(at, upload, place, checked);
    if (!done.added) await upload.discard();
    else await upload.store.discard();
    tellOfIntake({ grant: at, began, ensembleId: done.ensembleId });
    return done;
  } catch (error) {
    tellOfIntake({ grant: at, began, ensembleId: null });
    await upload?.discard();
    await form.drain();
    throw error;
  }
}
