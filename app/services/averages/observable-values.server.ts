import { and, asc, eq, isNotNull } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";
import { type Observable, observableValue } from "../../lib/averages/observable.ts";
import { ParityGroup } from "../../lib/averages/parity-group.ts";
import type { ColumnData } from "../../lib/column-data.ts";
import { acceptedFrames } from "../ensembles/accepted-frames.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";

/** Doubles read at once: 40 MB. */
const DOUBLES_AT_ONCE = 5_000_000;

export interface Molecule {
  id: string;
  atoms: number;
  frames: number;
  chirality: string;
  elements: Buffer;
  bonds: Buffer;
}

/** Exchanges that keep hands, told from the first accepted frame; null where none is accepted. */
export async function parityGroupOf(ensemble: Molecule, on: Queryable = db): Promise<ParityGroup | null> {
  const accepted = await acceptedFrames(ensemble.id, on);
  const first = accepted.indices[0];
  if (first === undefined) return null;
  const positions = await loadPositions(ensemble.id, ensemble.atoms, [first], on);
  return new ParityGroup(unpackMolecule(ensemble), positions, ensemble.chirality === "achiral");
}

/**
 * An observable in every frame of the ensemble's own molecule whose coordinates are there, held ones too: a frame that
 * is released later has its value already. Read block by block.
 *
 * @param group tells how frames are numbered; null where nothing is accepted yet
 */
export async function observableColumn(
  ensemble: Molecule,
  observable: Observable,
  group: ParityGroup | null,
  on: Queryable = db,
): Promise<ColumnData> {
  const rows = await on
    .select({ number: frames.number, index: frames.indexInShape })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensemble.id), eq(frames.shape, 0), isNotNull(frames.indexInShape)))
    .orderBy(asc(frames.number));
  const graph = unpackMolecule(ensemble);
  const data: ColumnData = {
    values: new Float64Array(ensemble.frames),
    present: new Uint8Array(ensemble.frames),
  };
  const length = 3 * ensemble.atoms;
  const step = Math.max(1, Math.floor(DOUBLES_AT_ONCE / length));
  for (let at = 0; at < rows.length; at += step) {
    const some = rows.slice(at, at + step);
    const positions = await loadPositions(
      ensemble.id,
      ensemble.atoms,
      some.map(({ index }) => index ?? -1),
      on,
    );
    for (const [row, { number }] of some.entries()) {
      const structure = positions.subarray(row * length, (row + 1) * length);
      const value = observableValue(observable, graph, structure, group?.relabelling(structure) ?? null);
      if (value === null || !Number.isFinite(value)) continue;
      data.values[number - 1] = value;
      data.present[number - 1] = 1;
    }
  }
  return data;
}
