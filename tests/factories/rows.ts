import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { ensembles, series, sifts } from "~/db/schema.server";

const NOTHING = Buffer.alloc(32);

/** A row of an ensemble for questions of access: it belongs to a team, its contents are empty. */
export async function makeEnsembleRow(
  teamId: string,
  options: { example?: boolean; createdByToken?: string | null; deletedAt?: Date | null } = {},
): Promise<string> {
  const [id, seriesId, now] = [newId(), newId(), new Date()];
  await db.insert(series).values({ id: seriesId, teamId, name: `Series ${seriesId}`, createdAt: now });
  await db.insert(ensembles).values({
    id,
    teamId,
    seriesId,
    name: "An ensemble",
    filesSha: null,
    answers: {
      energyUnit: null,
      energyFrom: null,
      level: null,
      energyKind: "electronic",
      energyTemperature: null,
    },
    example: options.example ?? false,
    formula: "H2O",
    atoms: 3,
    elements: Buffer.from([8, 1, 1, 0, 0, 0, 0, 0, 0]),
    bonds: Buffer.from(Int32Array.of(0, 1, 0, 2).buffer),
    chirality: "achiral",
    frames: 0,
    accepted: 0,
    remarked: 0,
    held: 0,
    openQuestions: 0,
    acceptedSha: NOTHING,
    readerVersion: "0",
    createdByToken: options.createdByToken ?? null,
    createdAt: now,
    changedAt: now,
    deletedAt: options.deletedAt ?? null,
  });
  return id;
}

/** A row of a sift of that ensemble that has not run. */
export async function makeSiftRow(ensembleId: string): Promise<string> {
  const id = newId();
  await db.insert(sifts).values({
    id,
    ensembleId,
    recipeSha: NOTHING,
    inputSha: NOTHING,
    recipe: {
      version: 1,
      level: null,
      levelName: null,
      window: null,
      energyTolerance: null,
      rmsdTolerance: 0.2,
      atoms: "heavy",
      symmetry: true,
      mirror: "keep",
      chirality: "chiral",
      chiralityOverridden: false,
    },
    jobId: newId(),
    createdAt: new Date(),
  });
  return id;
}
