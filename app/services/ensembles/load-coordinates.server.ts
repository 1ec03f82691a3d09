import { and, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembles, frames } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatCount } from "../../lib/format.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { loadPositions } from "./load-positions.server.ts";

/** Doubles of one answer: 160 MB. */
const MOST_DOUBLES = 20_000_000;

function invalid(message: string): DomainError {
  return new DomainError("invalid", "No coordinates", message, { faults: [{ field: "frames", message }] });
}

async function indexByFrame(ensembleId: string, numbers: number[]): Promise<Map<number, number>> {
  const rows = await db
    .select({ number: frames.number, index: frames.indexInShape })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.shape, 0), inArray(frames.number, numbers)));
  return new Map(rows.flatMap(({ number, index }) => (index === null ? [] : [[number, index] as const])));
}

/**
 * Coordinates of frames in the order asked, held ones of the same atoms too.
 *
 * @param options.frames numbers from 1
 * @returns packed [frame][atom][x, y, z] in Å
 * @throws DomainError invalid for a frame that is not there or has other atoms, too-large beyond 20,000,000 numbers
 */
export async function loadCoordinates(options: {
  actor: Actor;
  ensembleId: string;
  frames: number[];
}): Promise<Float64Array> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const rows = await db
    .select({ atoms: ensembles.atoms })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  const atoms = rows[0]?.atoms ?? 0;
  if (options.frames.length === 0) throw invalid("Name the frames, such as frames=1,5,9.");
  if (options.frames.length * atoms * 3 > MOST_DOUBLES) {
    const most = formatCount(Math.floor(MOST_DOUBLES / (3 * atoms)));
    throw new DomainError("too-large", "Too many frames", `Ask for at most ${most} frames at once.`);
  }
  const known = await indexByFrame(ensembleId, options.frames);
  const indices = options.frames.map((number) => {
    const index = known.get(number);
    if (index === undefined) throw invalid(`Frame ${number} is not in this ensemble, or has other atoms.`);
    return index;
  });
  return loadPositions(ensembleId, atoms, indices);
}
