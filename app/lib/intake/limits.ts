import { quoteFound } from "../text/escape.ts";
import { IntakeRejection } from "./reject.ts";

/** Limits of one upload (row G11). */
export interface FrameLimits {
  /** Highest frame number, over all files of an upload. */
  readonly frames: number;
  /** Atoms of one frame. */
  readonly atoms: number;
}

/** Where a limit was met. */
export interface LimitPlace {
  readonly file: string;
  readonly line: number;
  readonly frame: number;
}

/** @throws IntakeRejection (G11) where the frame that begins here is one too many */
export function checkFrameCount(limits: FrameLimits, place: LimitPlace): void {
  if (place.frame <= limits.frames) return;
  throw new IntakeRejection({
    code: "G11",
    ...place,
    message: `The limit is ${thousands(limits.frames)} frames, and frame ${thousands(place.frame)} begins here.`,
    hint: "Split the file, or narrow the energy window before the upload.",
  });
}

/**
 * @param written the count as the file writes it
 * @throws IntakeRejection (G11) where a frame announces more atoms than the limit
 */
export function checkAtomCount(atoms: number, written: string, limits: FrameLimits, place: LimitPlace): void {
  if (atoms <= limits.atoms) return;
  throw new IntakeRejection({
    code: "G11",
    ...place,
    found: quoteFound(written),
    message: `The limit is ${thousands(limits.atoms)} atoms a frame, and this frame announces more.`,
    hint: "Take solvent or surroundings out before the upload.",
  });
}

function thousands(value: number): string {
  return value.toLocaleString("en-GB");
}
