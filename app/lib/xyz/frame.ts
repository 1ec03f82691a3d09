import type { ExtendedEntry } from "../intake/extended-comment.ts";
import type { OpenReading } from "../intake/reading-choices.ts";
import type { HoldReason, IntakeMessage } from "../intake/report.ts";
import type { ExtraColumn } from "./layout.ts";

/** Why a frame is held: the message of the report, and the reason that decides whether it may be released. */
export interface FrameProblem extends IntakeMessage {
  readonly severity: "hold";
  readonly reason: HoldReason;
}

/** One frame as read. Lines, atoms and frames in messages count from 1. */
export interface XyzFrame {
  /** From 1, on through all files of an upload. */
  readonly number: number;
  readonly file: string;
  /** The count line. */
  readonly line: number;
  /** Lines that belong to it: atoms + 2, more for a broken range. */
  readonly lineCount: number;
  /** What the count line announces. */
  readonly declaredAtoms: number;
  /** The comment line as written. */
  readonly comment: string;
  /** True where the comment announces `Properties`. */
  readonly extended: boolean;
  /** `key=value` pairs of the comment, of a plain one too where it reads as such. */
  readonly keys: ReadonlyMap<string, ExtendedEntry>;
  /** Value of the key `name`, else of `label`. */
  readonly label: string | null;
  /** Total charge and multiplicity where keys state them; null is unknown, not 0 or 1. */
  readonly charge: number | null;
  readonly multiplicity: number | null;
  /** Atomic numbers, 0 for dummies. Frames of equal elements share one array: do not write. Empty where `problem` is set. */
  readonly elements: Uint8Array;
  /** Mass numbers where the file gives any, 0 elsewhere; null where it gives none. */
  readonly isotopes: Uint16Array | null;
  /** The file's names of the atoms, where at least one says more than its element; null for the others. */
  readonly labels: readonly (string | null)[] | null;
  /** Å, [x, y, z] an atom, an array of its own. Empty where `problem` is set. */
  readonly positions: Float64Array;
  /** Per-atom columns that were passed over. */
  readonly extra: readonly ExtraColumn[];
  /** What stands behind the count, or on lines after the frame; at most 2,000 characters. */
  readonly note: string | null;
  readonly problem: FrameProblem | null;
  /** What the frame leaves open and was read as proposed; left out where nothing is open. */
  readonly open?: readonly OpenReading[];
  /** Its numbers have decimal commas, those of its comment too. */
  readonly decimalCommas?: boolean;
  readonly remarks: readonly IntakeMessage[];
}

export const NOTE_LENGTH = 2000;
