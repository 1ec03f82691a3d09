import { intColumns, neededColumns, textColumns } from "./columns.ts";

/** The fourth line of a MOL block. */
export interface Counts {
  readonly atoms: number;
  readonly bonds: number;
  readonly chiralFlag: boolean;
  readonly version: "V2000" | "V3000";
  /** False where no version stands there (row S02). */
  readonly tagged: boolean;
}

export type CountsReading =
  | { readonly kind: "counts"; readonly counts: Counts }
  /** More than 999 atoms or bonds pushed the columns apart (row S06). */
  | { readonly kind: "overflow" }
  | { readonly kind: "unknown-version"; readonly version: string };

/** Column of the V in the version tag, from 0: the tag fills columns 34 to 39. */
const TAG_AT = 34;

/**
 * Reads a counts line by its columns: atoms 1 to 3, bonds 4 to 6, chiral flag 13 to 15, version 34 to 39.
 *
 * @returns null where the line is none
 * @example readCountsLine("130135  0  0  1  0            999 V2000") // 130 atoms, 135 bonds, chiral flag 1
 */
export function readCountsLine(text: string): CountsReading | null {
  if (isOverflow(text)) return { kind: "overflow" };
  const tag = textColumns(text, TAG_AT - 1, TAG_AT + 5).toUpperCase();
  const atoms = neededColumns(text, 0, 3);
  const bonds = neededColumns(text, 3, 6);
  if (atoms === null || bonds === null || atoms < 0 || bonds < 0) return null;
  if (tag === "" && !/^[ \d]+$/.test(text)) return null;
  if (tag !== "" && tag !== "V2000" && tag !== "V3000") {
    return /^V\d{4}/.test(tag) ? { kind: "unknown-version", version: tag } : null;
  }
  const chiralFlag = intColumns(text, 12, 15) === 1;
  const version = tag === "V3000" ? "V3000" : "V2000";
  return { kind: "counts", counts: { atoms, bonds, chiralFlag, version, tagged: tag !== "" } };
}

/**
 * Four digits where three have room: the tag moved to the right, or the digits fill more than both columns. Writers that
 * keep the columns fill them with asterisks.
 */
function isOverflow(text: string): boolean {
  if (/^(?:\*{3}|[ \d]{2}\d\*{3})/.test(text)) return true;
  const tag = text.search(/V2000/i);
  if (tag === TAG_AT + 1 || tag === TAG_AT + 2) return /^ {0,2}\d{4}/.test(text);
  return tag < 0 && (/^\d{7,8}(?: |$)/.test(text) || /^\d{4} {1,2}\d{1,2}(?: |$)/.test(text));
}
