import type { XyzFrame } from "../xyz/frame.ts";

/** Values by the name of their data field, in file order; a tag that stands twice keeps both. */
export type SdfFields = ReadonlyMap<string, readonly string[]>;

/**
 * One record of an SDF as read: a frame as the XYZ reader gives it, with what its bond table and data fields say
 * beyond coordinates. `line` is the counts line (the record's first line where there is none), `lineCount` runs from
 * there to the end of the record; `label` is the title, `comment` the third line, `charge` the sum of the atoms'.
 */
export interface SdfFrame extends XyzFrame {
  /** The second line: program, date, dimension. */
  readonly program: string;
  readonly version: "V2000" | "V3000";
  /** By the second line; null where it says nothing. */
  readonly dimension: 2 | 3 | null;
  readonly chiralFlag: boolean;
  /**
   * The file's bonds as pairs i < j, sorted, flat. Equal bonds of neighbouring records share one array, as do the
   * arrays below: do not write. Empty where `problem` is set.
   */
  readonly bonds: Int32Array;
  /** For each bond 1, 2, 3, 4 (aromatic), 9 (coordination) or 10 (hydrogen bond); null where all bonds are written as single against every valence. */
  readonly orders: Uint8Array | null;
  /** Formal charges of the atoms; null where all are 0. */
  readonly charges: Int8Array | null;
  /** 1 singlet, 2 doublet, 3 triplet at an atom, 0 elsewhere; null where there is none. */
  readonly radicals: Uint8Array | null;
  readonly fields: SdfFields;
}

/** Whether a frame came from an SDF. */
export function isSdfFrame(frame: XyzFrame): frame is SdfFrame {
  return "fields" in frame;
}
