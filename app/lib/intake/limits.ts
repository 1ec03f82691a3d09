/** Limits of one upload (row G11). */
export interface FrameLimits {
  /** Highest frame number, over all files of an upload. */
  readonly frames: number;
  /** Atoms of one frame. */
  readonly atoms: number;
}

export const DEFAULT_LIMITS: FrameLimits = { frames: 50_000, atoms: 1000 };
