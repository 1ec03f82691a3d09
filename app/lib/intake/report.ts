/** What intake says of files and frames. Plain data: the same shapes in the database, the API and the page. */

export type Severity = "remark" | "hold" | "question" | "reject";

/** State of a frame: held ones stay out of every computation; `remarked` ones are accepted. */
export type FrameState = "accepted" | "remarked" | "held";

/** Why a frame is held; decides whether a person may release it. */
export type HoldReason =
  | "unreadable" // broken or incomplete (X04, X08, X09, X10, X20, X23, X24, X28, X31, X36, ...): never released
  | "other-composition" // X12: another molecule
  | "other-order" // X13: same composition, other atom order, until mapping is asked
  | "other-species" // X38: bonds differ
  | "other-configuration" // X40: a stereocentre or double bond inverted
  | "waits-for-answer" // an open question concerns it
  | "unclear" // an `ask` row of formats.md that is not asked yet
  | "far-off" // energy far off the rest
  | "by-hand"; // a person's hold

/** One message. `frame`, `line`, `column` and `atom` count from 1; `found` is cut at 80 characters and escaped. */
export interface IntakeMessage {
  /** Row of the acceptance tables, such as "X09". */
  code: string;
  severity: Severity;
  file: string;
  line?: number;
  column?: number;
  frame?: number;
  atom?: number;
  found?: string;
  /** What is so, in words for people. */
  message: string;
  /** What to do, when something can be done. */
  hint?: string;
}

export interface QuestionOption {
  id: string;
  text: string;
  /** Spread in kcal/mol, values of the first frames and the like, for the page. */
  detail?: string;
  values?: (string | null)[];
  spreadKcal?: number | null;
  /** Highest minus lowest of the numbers as they are written, in whatever unit that is. */
  spread?: number | null;
  proposed?: boolean;
}

/** Something the files leave open. Frames that wait for it are held with `waits-for-answer`. */
export interface IntakeQuestion {
  id: string;
  /** "energy-from", "energy-unit" or "level". */
  code: string;
  /** The question as a title. */
  text: string;
  /** Why it is asked. */
  reason?: string;
  options: QuestionOption[];
  answered?: string;
}
