import type { SiftView } from "../../lib/views.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { chooseFirstSift, chooseSift, findSiftsOf, toSiftView } from "./find-sift.server.ts";

/**
 * The sift that a page of an ensemble shows.
 *
 * @param options.siftId one of the ensemble's own; without it the newest that fits its frames as they are (for
 *   guests of the example the first)
 * @returns null where none was ever asked for
 */
export async function loadSift(options: {
  actor: Actor;
  ensembleId: string;
  siftId?: string | null;
}): Promise<SiftView | null> {
  const { ensembleId, role } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const all = await findSiftsOf([ensembleId]);
  if (!options.siftId) {
    const chosen = role === "guest" ? chooseFirstSift(all) : chooseSift(all);
    return chosen === null ? null : toSiftView(chosen);
  }
  const named = all.find((sift) => sift.id === options.siftId);
  if (named === undefined) throw notFound();
  return toSiftView(named);
}
