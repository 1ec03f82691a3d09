import type { Transaction } from "../../db/client.server.ts";
import { recomputeObservables } from "../averages/recompute-observables.server.ts";
import { recomputeDerived } from "./recompute-derived.server.ts";

/**
 * Computes every column again that is computed: what is measured on structures, then formulas over all others. In the
 * transaction that changed frames or numbers, once `ensembles.frames` says how many there are now.
 */
export async function recomputeComputed(tx: Transaction, ensembleId: string): Promise<void> {
  await recomputeObservables(tx, ensembleId);
  await recomputeDerived(tx, ensembleId);
}
