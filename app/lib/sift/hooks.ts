/** What a long computation may tell and ask its surroundings; none of it changes the result. */
export interface SiftHooks {
  /** 0 to 1, now and then, with the pairs compared so far where they are counted. */
  progress?(fraction: number, pairs?: number): void;
  /** True ends the computation with `SiftCancelled`. */
  cancelled?(): boolean;
  /** Milliseconds of any steady clock, for `seconds`. */
  now?(): number;
}

/** Thrown by a sift whose `cancelled` hook said so. */
export class SiftCancelled extends Error {
  constructor() {
    super("The sift was cancelled.");
    this.name = "SiftCancelled";
  }
}
