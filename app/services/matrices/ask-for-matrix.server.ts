import { createHash } from "node:crypto";
import { and, eq } from "drizzle-orm";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { ensembles, pairMatrices } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatCount } from "../../lib/format.ts";
import type { SiftRecipe } from "../../lib/recipe/recipe.ts";
import { ATOM_SET_WORDS } from "../../lib/workbench/recipe-words.ts";
import { type Actor, accessSift, type Grant } from "../auth/access.server.ts";
import { matrixJob } from "../jobs/definitions/matrix.ts";
import { enqueueJob } from "../jobs/enqueue-job.server.ts";
import { wakeJobs } from "../jobs/run-jobs.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { findSift, readResult } from "../sifts/find-sift.server.ts";
import { findMatrix, type MatrixState } from "./find-matrix.server.ts";
import { MOST_FRAMES } from "./matrix-recipe.ts";

type Asker = Grant & { ensembleId: string };

/** The frames whose distances are asked for: the distinct set in its order, or all that the sift compared. */
export type MatrixFrames = "kept" | "compared";

/**
 * Asks for the distances of all pairs of a sift's frames, with the atoms, symmetry and mirror rule of its recipe. The
 * same question on the same frames is the same matrix; one that failed or was cancelled runs again.
 *
 * @throws DomainError conflict while the sift is not done, invalid for fewer than two frames or more than 5,000
 */
export async function askForMatrix(options: {
  actor: Actor;
  siftId: string;
  frames: MatrixFrames;
}): Promise<MatrixState> {
  const grant = await accessSift(options.actor, "compute", options.siftId);
  const sift = await findSift(grant.siftId);
  const result = await readResult(grant.siftId);
  if (result === null) {
    throw new DomainError("conflict", "The sift is not done", "Wait for its end, then ask for distances.");
  }
  const kept = result.kept.map(({ frame }) => frame);
  const all = [...kept, ...result.dropped.map(({ frame }) => frame)].sort((a, b) => a - b);
  const numbers = options.frames === "kept" ? kept : all;
  if (numbers.length < 2) throw unfit("Fewer than two frames have no distances.");
  if (numbers.length > MOST_FRAMES) {
    throw unfit(
      `These are ${formatCount(numbers.length)} frames; the distances of all pairs are computed for up to ${formatCount(MOST_FRAMES)}. Take the distinct set, or narrow its energy window.`,
    );
  }
  const recipe = recipeOf(sift);
  const ask = () =>
    inTransaction((tx) => insertOrFind(tx, grant, recipe, numbers), { isolation: "read committed" });
  const id = await ask().catch((error: unknown) => {
    if (isDuplicate(error)) return ask();
    throw error;
  });
  wakeJobs();
  return findMatrix(id);
}

function unfit(message: string): DomainError {
  return new DomainError("invalid", "No distances of these frames", message, {
    faults: [{ field: "frames", message }],
  });
}

/** The distances of a sift's distinct set where somebody asked for them on these frames; null where nobody did. */
export async function matrixOfSift(options: { actor: Actor; siftId: string }): Promise<MatrixState | null> {
  const grant = await accessSift(options.actor, "read", options.siftId);
  const sift = await findSift(grant.siftId);
  const result = await readResult(grant.siftId);
  if (result === null) return null;
  const inputSha = await checksumOf(
    db,
    grant.ensembleId,
    recipeOf(sift),
    result.kept.map(({ frame }) => frame),
  );
  const [known] = await db
    .select({ id: pairMatrices.id })
    .from(pairMatrices)
    .where(and(eq(pairMatrices.ensembleId, grant.ensembleId), eq(pairMatrices.inputSha, inputSha)));
  return known === undefined ? null : findMatrix(known.id);
}

type Recipe = { version: 1; atoms: "heavy" | "heavy+polarH" | "all"; symmetry: boolean; mirror: boolean };

function recipeOf({ recipe }: { recipe: SiftRecipe }): Recipe {
  const { atoms, symmetry, mirror } = recipe;
  return { version: 1, atoms, symmetry, mirror: mirror === "merge" };
}

/** Of the question: elements, bonds and coordinates are in the checksum of the accepted frames. */
async function checksumOf(
  on: Queryable,
  ensembleId: string,
  recipe: Recipe,
  numbers: readonly number[],
): Promise<Buffer> {
  const molecule = await on
    .select({ sha: ensembles.acceptedSha })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  return createHash("sha256")
    .update("pair matrix 1\n")
    .update(molecule[0]?.sha ?? "")
    .update(JSON.stringify([recipe, numbers]))
    .digest();
}

async function insertOrFind(
  tx: Queryable,
  at: Asker,
  recipe: Recipe,
  numbers: readonly number[],
): Promise<string> {
  const inputSha = await checksumOf(tx, at.ensembleId, recipe, numbers);
  const same = await tx
    .select({ id: pairMatrices.id })
    .from(pairMatrices)
    .where(and(eq(pairMatrices.ensembleId, at.ensembleId), eq(pairMatrices.inputSha, inputSha)))
    .for("update");
  const known = same[0]?.id;
  const id = known ?? newId();
  if (known !== undefined) {
    const { status } = await findMatrix(known, tx);
    if (status !== "failed" && status !== "cancelled") return known;
  }
  const jobId = await enqueueJob(tx, matrixJob, {
    payload: { matrixId: id },
    teamId: at.teamId,
    userId: at.userId,
  });
  if (known !== undefined) await tx.update(pairMatrices).set({ jobId }).where(eq(pairMatrices.id, id));
  else {
    await tx.insert(pairMatrices).values({
      id,
      ensembleId: at.ensembleId,
      inputSha,
      recipe,
      numbers,
      jobId,
      createdAt: new Date(),
    });
  }
  const data = { conformers: numbers.length, atoms: ATOM_SET_WORDS[recipe.atoms] };
  await writeEntry(tx, at, at, { type: "pair-matrix", data });
  return id;
}
