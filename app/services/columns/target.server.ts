import type { ensembles } from "../../db/schema.server.ts";
import type { Graph } from "../../lib/structure.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";

/** The ensemble that columns are added to, as it stands before. */
export interface TargetEnsemble {
  teamId: string;
  ensembleId: string;
  row: typeof ensembles.$inferSelect;
  graph: Graph;
  /** One character a frame in file order, "h" where held. */
  strip: string;
}

/** Loads what further columns are matched with; access has been decided before. */
export async function loadTarget(at: { teamId: string; ensembleId: string }): Promise<TargetEnsemble> {
  const { ensemble } = await findEnsembleRow(at.teamId, at.ensembleId);
  return {
    teamId: at.teamId,
    ensembleId: ensemble.id,
    row: ensemble,
    graph: unpackMolecule(ensemble),
    strip: await frameStrip(ensemble.id),
  };
}
