import type { EditionView } from "../../lib/edition/views.ts";
import { type Actor, accessEdition } from "../auth/access.server.ts";
import { toEditionView } from "./edition-view.server.ts";
import { findEdition, findPositions, lastVerification } from "./find-edition.server.ts";

/** An edition as a guest would see it, for a member of the team. */
export async function loadEdition(options: {
  actor: Actor;
  ensembleId: string;
  number: number;
}): Promise<EditionView> {
  const grant = await accessEdition(options.actor, "read", options.ensembleId, options.number);
  const edition = await findEdition(grant.teamId, grant.editionId);
  const verified = await lastVerification(edition.id);
  return toEditionView(edition, { sources: true, verified });
}

/** Coordinates of the most populated conformers of an edition, packed, the first first. */
export async function loadEditionPositions(options: {
  actor: Actor;
  ensembleId: string;
  number: number;
}): Promise<Float64Array> {
  const grant = await accessEdition(options.actor, "read", options.ensembleId, options.number);
  return findPositions(grant.editionId);
}
