import { readCountsLine } from "../sdf/counts-line.ts";

/** Format of a text; "unknown" leaves it to the XYZ reader to say what line 1 lacks. */
export type TextFormat = "xyz" | "sdf" | "csv" | "unknown";

/** What lines show, and whether nothing but a leading number speaks for it. */
export interface FormatReading {
  readonly format: TextFormat;
  /** More of the file, or its name, may still show that it is an SDF. */
  readonly open: boolean;
}

/** Reactions and other files of the family of MOL: their reader says what they are (row S24). */
const MOL_FAMILY = /^\$(?:RXN|MDL|RDFILE|RIREG|MFMT)/;
const RECORD_END = /^(?:M {2}(?:END|V30)|\$\$\$\$)/;
/** The version of a record at the end of its counts line, wherever counts that are too wide pushed it. */
const VERSION_MARK = /\bV[23]000\s*$/i;
/** Lines from the first that is not blank on in which the counts of a first record may stand. */
const COUNTS_WITHIN = 6;
/** Atom lines that have to fit. */
const FITTING = 3;
/** So much of a line is looked at. */
const LINE_CHARACTERS = 200;

/**
 * The format of a text by its first lines. A frame of XYZ is recognised by its shape before anything is taken for a record:
 * `V2000` in a comment makes no SDF. A record is recognised by the version on its counts line, whatever the counts are
 * (rows S01, S06), by counts in their columns with atom lines behind them, or by where a record ends.
 *
 * @param lines the first of the file, the last perhaps cut
 * @example textFormat(["3", "water", "O 0 0 0", "H 0 0 1"]) // { format: "xyz", open: false }
 */
export function textFormat(lines: readonly string[]): FormatReading {
  const sure = (format: TextFormat): FormatReading => ({ format, open: false });
  if (MOL_FAMILY.test(lines[0] ?? "")) return sure("sdf");
  const at = lines.findIndex((line) => line.trim() !== "");
  if (at < 0) return { format: "unknown", open: true };
  const first = lines[at] ?? "";
  const counted = /^\s*\+?\d+(?:\s|$)/.test(first) && !/[,;|]/.test(first);
  if (counted && isXyzFrame(lines, at)) return sure("xyz");
  if (hasCounts(lines, at)) return sure("sdf");
  // One such line may be the title of a record or a value of its data; several are atoms.
  const open = lines.filter(isSymbolFirst).length < 2;
  if (open && hasRecordEnd(lines)) return sure("sdf");
  if (counted) return { format: "xyz", open };
  return looksLikeTable(lines) ? sure("csv") : { format: "unknown", open };
}

/**
 * A record ends somewhere in these lines: what no other format has.
 *
 * @example hasRecordEnd(["M  END"]) // true
 */
export function hasRecordEnd(lines: readonly string[]): boolean {
  return lines.some((line) => RECORD_END.test(line));
}

/** A count, a comment and atoms, the first of them at least; or a comment that says what the columns are. */
function isXyzFrame(lines: readonly string[], at: number): boolean {
  if (/\bProperties\s*=/.test(lines[at + 1] ?? "")) return true;
  const count = Number(/\d+/.exec(lines[at] ?? "")?.[0] ?? 0);
  const atoms = lines.slice(at + 2, at + 2 + Math.min(count, FITTING));
  // The end of what was read may cut an atom line.
  const whole = at + 2 + atoms.length < lines.length ? atoms : atoms.slice(0, -1);
  return whole.length > 0 && whole.every(isXyzAtom);
}

/**
 * An element, label or atomic number and three numbers; a number before them, more columns and commas are allowed. Numbers
 * need not be sound: the reader says what is wrong with them.
 */
function isXyzAtom(line: string): boolean {
  if (VERSION_MARK.test(line)) return false;
  const blanks = fieldsOf(line, /\s+/);
  const fields = blanks.length < 4 ? fieldsOf(line, /[\s,;]+/) : blanks;
  const named = /^\d+$/.test(fields[0] ?? "") && /^[A-Za-z]/.test(fields[1] ?? "") ? fields.slice(1) : fields;
  const [name = "", ...numbers] = named;
  const isName = /^[A-Za-z@*]/.test(name) || /^\d{1,3}(?:[A-Za-z].*)?$/.test(name);
  return (
    isName && numbers.length >= 3 && numbers.slice(0, 3).every((text) => /^[+\-\u2212]?[.,]?\d/.test(text))
  );
}

function fieldsOf(line: string, between: RegExp): string[] {
  return line.slice(0, LINE_CHARACTERS).trim().split(between);
}

/** A line of XYZ that no record has: a symbol first, then three numbers. */
function isSymbolFirst(line: string): boolean {
  return /^\s*[A-Za-z]/.test(line) && isXyzAtom(line);
}

function hasCounts(lines: readonly string[], at: number): boolean {
  // Title, program and comment may be blank, and a line of them may be missing.
  for (let k = Math.max(2, at); k <= at + COUNTS_WITHIN; k++) {
    const line = (lines[k] ?? "").slice(0, LINE_CHARACTERS);
    if (isMarked(line) && /^[ \d*+.-]{3}/.test(line)) return true;
    const atoms = lines.slice(k + 1, k + 3);
    const fitting = atoms.filter(isRecordAtom).length;
    if (k >= 3 && (fitting === 2 || (fitting === 1 && readCountsLine(line) !== null))) return true;
  }
  return false;
}

/** The version in its columns, or as the last of the line where the counts pushed it out of them. */
function isMarked(line: string): boolean {
  return VERSION_MARK.test(line) || /^ {0,3}V[23]000/i.test(line.slice(33));
}

/** Three coordinates of ten columns with four decimals, the symbol from column 32, and further columns behind it. */
function isRecordAtom(line: string): boolean {
  return /^(?: {0,8}-?\d{1,5}\.\d{4}){3} [A-Za-z*]/.test(line) && /^.{30} /.test(line);
}

/** Two rows or more with the same number, two at least, of one delimiter. */
function looksLikeTable(lines: readonly string[]): boolean {
  const rows = lines
    .filter((line) => line.trim() !== "")
    .slice(0, -1)
    .slice(0, 20);
  if (rows.length < 2) return false;
  return [",", ";", "\t", "|"].some((delimiter) => {
    const counts = rows.map((row) => row.split(delimiter).length);
    return counts.every((count) => count === counts[0] && count > 1) && /[A-Za-z]/.test(rows[0] ?? "");
  });
}
