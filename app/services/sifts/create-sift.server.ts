import { createHash } from "node:crypto";
import { and, desc, eq, isNull } from "drizzle-orm";
import { inTransaction, type Queryable } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { columns, ensembles, sifts } from "../../db/schema.server.ts";
import type { Warnings } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import type { SiftRecipe, SiftRequest } from "../../lib/recipe/recipe.ts";
import { canonicalRecipe, resolveRecipe } from "../../lib/recipe/resolve.ts";
import type { SiftStatus } from "../../lib/views.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { geometrySha, siftInputSha } from "../ensembles/accepted-frames.server.ts";
import { notFound } from "../http.server.ts";
import { siftJob } from "../jobs/definitions/sift.ts";
import { enqueueJob } from "../jobs/enqueue-job.server.ts";
import { wakeJobs } from "../jobs/run-jobs.server.ts";
import { type Doer, writeEntry } from "../logbook/write-entry.server.ts";
import { findSift, lastAsked } from "./find-sift.server.ts";
import { siftWarnings } from "./standing.server.ts";

export interface AskedSift {
  id: string;
  status: SiftStatus;
  progress: number;
}

interface Asker extends Doer {
  teamId: string;
  ensembleId: string;
}

/** What the request means on the frames as they are: complete recipe, and checksums of it and of its input. */
async function resolve(tx: Queryable, at: Asker, request: SiftRequest) {
  const rows = await tx
    .select({
      accepted: ensembles.accepted,
      openQuestions: ensembles.openQuestions,
      acceptedSha: ensembles.acceptedSha,
      chirality: ensembles.chirality,
    })
    .from(ensembles)
    .where(
      and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)),
    );
  const ensemble = rows[0];
  if (ensemble === undefined) throw notFound();
  const levels = await tx
    .select({ id: columns.id, name: columns.name, dataSha: columns.dataSha, unit: columns.unit })
    .from(columns)
    .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.kind, "energy")));
  const recipe = resolveRecipe(request, { levels, chirality: ensemble.chirality });
  if (ensemble.accepted === 0) throw nothingToSift(ensemble.openQuestions);
  const level = levels.find(({ id }) => id === recipe.level) ?? null;
  const numbers = level && { dataSha: level.dataSha ?? Buffer.alloc(32), unit: level.unit };
  const inputSha = siftInputSha(ensemble.acceptedSha ?? Buffer.alloc(32), numbers);
  const recipeSha = createHash("sha256").update(canonicalRecipe(recipe)).digest();
  return { recipe, recipeSha, inputSha };
}

function nothingToSift(openQuestions: number): DomainError {
  return openQuestions > 0
    ? new DomainError(
        "conflict",
        "Intake waits for an answer",
        `All frames wait for ${openQuestions === 1 ? "an answer" : `${openQuestions} answers`}. Answer what intake asked, then sift.`,
      )
    : new DomainError(
        "invalid",
        "No frame to sift",
        "No frame of this ensemble is accepted. Release frames, or take in a file whose frames can be used.",
      );
}

async function startAgain(tx: Queryable, siftId: string, at: Asker, recipe: SiftRecipe, automatic: boolean) {
  const jobId = await enqueueJob(tx, siftJob, {
    payload: { siftId },
    teamId: at.teamId,
    userId: at.userId,
  });
  await tx
    .update(sifts)
    .set({ jobId, result: null, summary: null, keptCount: null, createdAt: new Date(), askedAt: null })
    .where(eq(sifts.id, siftId));
  await writeEntry(tx, at, at, { type: "sift", data: { siftId, automatic, recipe } });
}

/**
 * Makes a known sift the one that pages show where no other is named: whoever asks for it again, by going back to
 * earlier settings, means it. That changes the set for everybody, so the logbook has it.
 */
async function putFirst(tx: Queryable, siftId: string, at: Asker, recipe: SiftRecipe): Promise<void> {
  const newest = await tx
    .select({ id: sifts.id })
    .from(sifts)
    .where(eq(sifts.ensembleId, at.ensembleId))
    .orderBy(desc(lastAsked), desc(sifts.id))
    .limit(1);
  if (newest[0]?.id === siftId) return;
  await tx.update(sifts).set({ askedAt: new Date() }).where(eq(sifts.id, siftId));
  await writeEntry(tx, at, at, { type: "sift", data: { siftId, automatic: false, back: true, recipe } });
}

async function insertOrFind(
  tx: Queryable,
  at: Asker,
  request: SiftRequest,
  automatic: boolean,
): Promise<string> {
  const { recipe, recipeSha, inputSha } = await resolve(tx, at, request);
  const same = await tx
    .select({ id: sifts.id })
    .from(sifts)
    .where(
      and(eq(sifts.ensembleId, at.ensembleId), eq(sifts.recipeSha, recipeSha), eq(sifts.inputSha, inputSha)),
    )
    .for("update");
  const known = same[0]?.id;
  if (known !== undefined) {
    const { status } = await findSift(known, tx);
    if (status === "failed" || status === "cancelled") await startAgain(tx, known, at, recipe, automatic);
    else if (!automatic) await putFirst(tx, known, at, recipe);
    return known;
  }
  const id = newId();
  const jobId = await enqueueJob(tx, siftJob, {
    payload: { siftId: id },
    teamId: at.teamId,
    userId: at.userId,
  });
  await tx.insert(sifts).values({
    id,
    ensembleId: at.ensembleId,
    recipeSha,
    inputSha,
    geometrySha: await geometrySha(tx, at.ensembleId),
    recipe,
    jobId,
    createdBy: at.userId,
    createdAt: new Date(),
  });
  await writeEntry(tx, at, at, { type: "sift", data: { siftId: id, automatic, recipe } });
  return id;
}

/**
 * Asks for a sift on the frames as they are; access has been decided before. The same recipe on the same frames is the
 * same sift, whoever asks and however many at once; one that failed or was cancelled runs again.
 *
 * @throws DomainError invalid for a level, window or mirror rule that the ensemble does not allow, conflict while all
 *   frames wait for an answer
 */
export async function askForSift(
  at: Asker,
  request: SiftRequest,
  options: { automatic?: boolean } = {},
): Promise<AskedSift> {
  const automatic = options.automatic === true;
  // Without locks on gaps: many who ask for the same at once wait for the first, instead of ending each other.
  const ask = () =>
    inTransaction((tx) => insertOrFind(tx, at, request, automatic), { isolation: "read committed" });
  const id = await ask().catch((error: unknown) => {
    // Somebody asked for the same one at the same moment: it is there now.
    if (isDuplicate(error)) return ask();
    throw error;
  });
  wakeJobs();
  const { status, progress } = await findSift(id);
  return { id, status, progress };
}

/** Asks for a sift as a person or a token; what is to be known of its energies comes with the answer. */
export async function createSift(options: {
  actor: Actor;
  ensembleId: string;
  request: SiftRequest;
}): Promise<AskedSift & { warnings: Warnings }> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const asked = await askForSift(grant, options.request);
  return { ...asked, warnings: await siftWarnings(await findSift(asked.id), null) };
}
