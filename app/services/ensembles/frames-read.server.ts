import type { Actor } from "../auth/access.server.ts";

/**
 * How many frames the uploads of this process have read so far, for the people who sent them. A number in memory: an
 * upload is read by the process that its connection leads to, and nothing of it outlasts that.
 */
const kept = globalThis as typeof globalThis & { lowlyingFramesRead?: Map<string, number> };

const HEADER = "upload-key";
/** What a page calls an upload of its own: long enough that two pages of one person do not meet. */
const KEY = /^[a-z0-9]{16,64}$/;

function numbers(): Map<string, number> {
  kept.lowlyingFramesRead ??= new Map();
  return kept.lowlyingFramesRead;
}

/** A key counts for its person alone. */
function nameOf(actor: Actor, key: string | null): string | null {
  return actor.kind === "user" && key !== null && KEY.test(key) ? `${actor.userId} ${key}` : null;
}

/** Told of the frames while files are read. */
export type FramesTold = (frames: number) => void;

/**
 * Runs an upload whose frames can be asked for meanwhile, where the request names a key in `upload-key`.
 *
 * @param work is given what is to be told of the frames read so far
 */
export async function withFramesRead<Result>(
  actor: Actor,
  request: Request,
  work: (told: FramesTold | undefined) => Promise<Result>,
): Promise<Result> {
  const name = nameOf(actor, request.headers.get(HEADER));
  if (name === null) return work(undefined);
  numbers().set(name, 0);
  try {
    return await work((frames) => numbers().set(name, frames));
  } finally {
    numbers().delete(name);
  }
}

/** Frames that an upload under way of this person has read; null where there is none of that key. */
export function framesRead(actor: Actor, key: string | null): number | null {
  const name = nameOf(actor, key);
  return name === null ? null : (numbers().get(name) ?? null);
}
