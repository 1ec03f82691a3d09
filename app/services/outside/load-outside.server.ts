import type { OutsideChoice } from "../../lib/outside/choice.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { loadSift } from "../sifts/load-sift.server.ts";
import { compareOutside, type OutsideComparison } from "./compare-outside.server.ts";
import {
  type DeletedOutsideView,
  listDeletedOutside,
  listOutside,
  type OutsideView,
} from "./list-outside.server.ts";

export interface OutsidePage {
  structures: OutsideView[];
  deleted: DeletedOutsideView[];
  /** Of the structure chosen, else the newest, with the sift shown; null where there is none of either. */
  comparison: OutsideComparison | null;
  /** The structure was mapped onto the molecule as it was read before. */
  outdated: boolean;
}

/** What the page shows of structures from outside: all of them, and one compared with the distinct set. */
export async function loadOutside(options: {
  actor: Actor;
  ensembleId: string;
  siftId: string | null;
  choice: OutsideChoice;
}): Promise<OutsidePage> {
  const { actor, siftId, choice } = options;
  const { ensembleId } = await accessEnsemble(actor, "read", options.ensembleId);
  const [structures, deleted] = await Promise.all([listOutside(ensembleId), listDeletedOutside(ensembleId)]);
  const outside = structures.find(({ id }) => id === choice.outside) ?? structures.at(-1);
  const nothing = { structures, deleted, comparison: null, outdated: false };
  if (outside === undefined) return nothing;
  const sift = await loadSift({ actor, ensembleId, siftId });
  if (sift === null || sift.result === null) return nothing;
  const { id, result, recipe } = sift;
  const comparison = await compareOutside({ ensembleId, outside, sift: { id, result, recipe }, choice });
  return { structures, deleted, comparison, outdated: comparison === null };
}
