import { and, eq } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { columns, ensembles } from "../../db/schema.server.ts";
import { packAccepted } from "../../lib/accepted-data.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatBytes } from "../../lib/format.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { acceptedFrames, siftInputSha } from "./accepted-frames.server.ts";
import { loadPositions } from "./load-positions.server.ts";
import { unpackMolecule } from "./molecule.server.ts";

/** Bytes of coordinates that a browser is given at once. */
const MOST_BYTES = 160 * 2 ** 20;

export interface AcceptedBytes {
  /** Names the frames and energies: the same one means the same bytes. */
  tag: string;
  load(): Promise<Uint8Array<ArrayBuffer>>;
}

/**
 * The accepted frames with their energies at a level, for computing in a browser.
 *
 * @param options.levelId null leaves energies out
 * @throws DomainError not-found for a level of another ensemble, too-large where the browser should not carry it
 */
export async function loadAccepted(options: {
  actor: Actor;
  ensembleId: string;
  levelId: string | null;
}): Promise<AcceptedBytes> {
  const { ensembleId, teamId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const rows = await db
    .select({
      atoms: ensembles.atoms,
      elements: ensembles.elements,
      bonds: ensembles.bonds,
      accepted: ensembles.accepted,
      frames: ensembles.frames,
      acceptedSha: ensembles.acceptedSha,
    })
    .from(ensembles)
    .where(and(eq(ensembles.id, ensembleId), eq(ensembles.teamId, teamId)));
  const ensemble = rows[0];
  if (ensemble === undefined) throw notFound();
  const bytes = 24 * ensemble.atoms * ensemble.accepted;
  if (bytes > MOST_BYTES) {
    const message = `The coordinates take ${formatBytes(bytes)}; a browser is given at most ${formatBytes(MOST_BYTES)}.`;
    throw new DomainError("too-large", "Too much for a browser", message);
  }
  const level = options.levelId === null ? null : await levelOf(ensembleId, options.levelId);
  const input = level && { dataSha: level.dataSha ?? Buffer.alloc(32), unit: level.unit };
  const tag = siftInputSha(ensemble.acceptedSha ?? Buffer.alloc(32), input).toString("hex");
  return {
    tag,
    load: () =>
      inTransaction(async (tx) => {
        const accepted = await acceptedFrames(ensembleId, tx);
        const positions = await loadPositions(ensembleId, ensemble.atoms, accepted.indices, tx);
        const energies = level && rowsOf(level.data, ensemble.frames, accepted.numbers);
        const { elements, isotopes, bonds } = unpackMolecule(ensemble);
        return packAccepted({ elements, isotopes, bonds, numbers: accepted.numbers, energies, positions });
      }),
  };
}

async function levelOf(ensembleId: string, levelId: string) {
  const rows = await db
    .select({ data: columns.data, dataSha: columns.dataSha, unit: columns.unit })
    .from(columns)
    .where(and(eq(columns.id, levelId), eq(columns.ensembleId, ensembleId), eq(columns.kind, "energy")));
  const level = rows[0];
  if (level === undefined) throw notFound();
  return level;
}

function rowsOf(data: Uint8Array, frames: number, numbers: Int32Array) {
  const all = unpackColumn(data, frames);
  return {
    values: Float64Array.from(numbers, (number) => all.values[number - 1] ?? 0),
    present: Uint8Array.from(numbers, (number) => all.present[number - 1] ?? 0),
  };
}
