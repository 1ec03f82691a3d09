import { eq, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembleFiles, type ensembles } from "../../db/schema.server.ts";
import type { MoleculeGroup } from "../../lib/intake/frame-record.ts";
import type { ReadingChoices } from "../../lib/intake/reading-choices.ts";
import { unpackMolecule } from "./molecule.server.ts";
import type { ReadingOptions } from "./reading.server.ts";

type EnsembleRow = typeof ensembles.$inferSelect;

/** Where a batch joins its ensemble. */
export interface BatchPlace {
  ensemble: EnsembleRow;
  files: number;
  batch: number;
}

/** Files of an ensemble, and the number of its next batch. */
export async function countFiles(ensembleId: string): Promise<{ files: number; batch: number }> {
  const rows = await db
    .select({
      files: sql<number | null>`max(${ensembleFiles.position})`,
      batch: sql<number | null>`max(${ensembleFiles.batch})`,
    })
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, ensembleId));
  return { files: (rows[0]?.files ?? -1) + 1, batch: (rows[0]?.batch ?? 0) + 1 };
}

/** What the frames of a further batch are compared with. */
export function groupOf(ensemble: EnsembleRow): MoleculeGroup {
  const graph = unpackMolecule(ensemble);
  const identity = ensemble.identity as Pick<
    MoleculeGroup,
    "charge" | "multiplicity" | "configuration" | "seen"
  >;
  return {
    ...identity,
    elements: [...graph.elements],
    isotopes: [...graph.isotopes],
    bonds: [...graph.bonds],
  };
}

/** How the files of a batch are read: behind what is there, compared with its molecule. */
export const optionsAt = (
  { ensemble, files, batch }: BatchPlace,
  energyFrom: string | null,
  choices: ReadingChoices = {},
  settled?: ReadonlySet<number>,
): ReadingOptions => ({
  energyFrom,
  group: groupOf(ensemble),
  map: true,
  after: { frames: ensemble.frames, files, batch },
  choices,
  settled,
});
