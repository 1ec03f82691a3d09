import { eq } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { batches, ensembles } from "../../db/schema.server.ts";
import type { UploadFields, Warnings } from "../../lib/api/schemas.ts";
import type { Grant } from "../auth/access.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { type CompletedReading, completeReading, type WrittenAnswers } from "./complete-reading.server.ts";
import { DEFAULT_SERIES, seriesByName } from "./create-series.server.ts";
import { levelsInUse } from "./intake-rows.server.ts";
import { endReading, sourcesOf } from "./read-stored.server.ts";
import { answerSameFiles, filesSha, findSameFiles } from "./same-files.server.ts";
import { siftAfterIntake } from "./sift-after-intake.server.ts";
import { pointFiles } from "./store-files.server.ts";
import type { Upload } from "./upload.server.ts";

/** Each lost race names its winner in the next try; more losses than these are no race. */
const PUBLISH_TRIES = 4;

function writtenAnswers(fields: UploadFields): WrittenAnswers {
  return {
    energyUnit: fields.energyUnit ?? null,
    energyFrom: fields.energyFrom ?? null,
    level: fields.level ?? null,
    energyKind: fields.energyKind ?? "electronic",
    energyTemperature: fields.energyTemperature ?? null,
    ...(fields.energyKind === undefined ? {} : { kindStated: true }),
  };
}

/** "run3.xyz.gz" becomes "run3"; what else stands behind dots belongs to the name. */
function nameOfFile(name: string): string {
  const stem = name.replace(/(\.(xyz|extxyz|txt|sdf|sd|mol))?(\.gz|\.zip)?$/i, "").trim();
  return [...(stem === "" ? name : stem)].slice(0, 200).join("");
}

export interface TakenIn {
  ensembleId: string;
  teamId: string;
  /** False where the same files with the same answers were here before. */
  created: boolean;
  /** What of the request was not taken up, where files were here before. */
  warnings?: Warnings;
}

interface Finish {
  upload: Upload;
  grant: Grant;
  fields: UploadFields;
  interactive: boolean;
}

/** The last act: from one moment to the next the ensemble is there, with its files and its entry in the logbook. */
async function publish(
  { upload, grant, fields }: Finish,
  sha: Buffer,
  written: WrittenAnswers,
  done: CompletedReading,
): Promise<void> {
  const { reading, store } = upload;
  const name = fields.name ?? nameOfFile(upload.names[0] ?? "Ensemble");
  const act = async (tx: Transaction) => {
    await pointFiles(tx, reading.ensembleId, await upload.publish(tx));
    const seriesId = await seriesByName(tx, grant.teamId, fields.series ?? DEFAULT_SERIES, grant);
    const now = new Date();
    await tx
      .update(ensembles)
      .set({
        name,
        seriesId,
        filesSha: sha,
        deletedAt: null,
        readingSince: null,
        createdAt: now,
        changedAt: now,
      })
      .where(eq(ensembles.id, reading.ensembleId));
    await tx.insert(batches).values({
      ensembleId: reading.ensembleId,
      batch: 0,
      filesSha: sha,
      answers: written,
      createdBy: grant.userId,
      createdByToken: grant.tokenId,
      createdAt: now,
    });
    const files = store.written.map((file, at) => ({
      name: upload.names[at] ?? "",
      sha256: file.sha256.toString("hex"),
      bytes: file.bytes,
    }));
    const { energyUnit, energyFrom, level } = written;
    await writeEntry(tx, { teamId: grant.teamId, ensembleId: reading.ensembleId }, grant, {
      type: "intake",
      data: {
        name,
        files,
        answers: { energyUnit, energyFrom, level },
        questions: done.questions,
        ...done.counts,
      },
    });
  };
  // Without locks on gaps: uploads of the same files at once wait for the first, instead of ending each other.
  await inTransaction(act, { isolation: "read committed" });
}

/**
 * Makes the ensemble of an upload whose files are all read, or finds the one that the same files made before.
 *
 * @throws DomainError conflict for the same files with other answers, and what reading and completing throw
 */
export async function finishUpload(all: Finish): Promise<TakenIn> {
  const { upload, grant, fields, interactive } = all;
  const written = writtenAnswers(fields);
  const sha = filesSha(upload.store.written.map((file) => file.sha256));
  const known = await findSameFiles(grant.teamId, sha);
  if (known) {
    return { ...(await answerSameFiles(known, written, all)), teamId: grant.teamId, created: false };
  }
  const { reading, result } = await endReading(upload.reading, grant, upload.kept());
  upload.reading = reading;
  const done = await completeReading(upload.reading, result, {
    answers: written,
    kindStated: fields.energyKind !== undefined,
    written,
    mode: {
      refuseOpen: !interactive,
      confirmUnit: interactive,
      knownLevels: interactive ? await levelsInUse(grant.teamId) : [],
    },
    sources: sourcesOf(reading, upload.kept()),
  });
  for (let attempt = 1; ; attempt++) {
    try {
      await publish(all, sha, written, done);
      break;
    } catch (error) {
      if (!isDuplicate(error)) throw error;
      // Somebody was faster by a moment: with the same ensemble, or only with one of its files or its series.
      const winner = await findSameFiles(grant.teamId, sha);
      if (winner) {
        return { ...(await answerSameFiles(winner, written, all)), teamId: grant.teamId, created: false };
      }
      if (attempt >= PUBLISH_TRIES) throw error;
    }
  }
  const { ensembleId } = upload.reading;
  await siftAfterIntake({ ...grant, ensembleId });
  return { ensembleId, teamId: grant.teamId, created: true };
}
