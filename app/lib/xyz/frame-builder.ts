import {
  type CommentOddity,
  type ExtendedEntry,
  hasProperties,
  hasValue,
  parseExtendedComment,
} from "../intake/extended-comment.ts";
import type { Ask, OpenReading, ReadingChoices } from "../intake/reading-choices.ts";
import {
  type AtomFault,
  type AtomLine,
  looksLikeAtom,
  makeAtom,
  type NamedAtom,
  type ReadAtom,
  readAtomLine,
} from "./atom-line.ts";
import type { CountLine } from "./count-line.ts";
import { type ExtraColumn, isPlainOrder, type Layout, PLAIN_LAYOUT, parseProperties } from "./layout.ts";
import type { OpenCapitals } from "./open-frame.ts";
import { readOpenLine } from "./open-line.ts";
import type { NamedElement, PlainTarget } from "./plain-atoms.ts";

/** A fault with the line it stands on, and the atom (from 1) where it concerns one. */
export interface BuilderFault extends AtomFault {
  readonly line: number;
  readonly atom?: number;
}

/** One line for the slow path. */
export interface TextLine {
  readonly text: string;
  readonly number: number;
}

const NO_KEYS: ReadonlyMap<string, ExtendedEntry> = new Map();
const NO_ELEMENTS = new Uint8Array(0);
const NO_POSITIONS = new Float64Array(0);
/** Shared by all frames that leave nothing open: nearly all of them. */
const NOTHING_OPEN: ReadonlyMap<Ask, OpenReading> = new Map();
const NO_CAPITALS: readonly OpenCapitals[] = [];
const NO_ATOMS: ReadonlySet<number> = new Set();
const NO_COLUMNS: readonly ExtraColumn[] = [];
/** x, y and z of a line that may turn out to be no atom. */
const position = new Float64Array(3);
const NO_ODDITIES: ReadonlyMap<CommentOddity, string> = new Map();

/**
 * One frame in the making: fed with its comment and atom lines, it keeps the first fault and goes on to the last of
 * its lines, so that the frames behind it keep their places.
 */
export class FrameBuilder implements PlainTarget {
  readonly count: number;
  readonly countLine: CountLine;
  readonly line: number;
  /** Empty until the first atom: most candidates of a search are no frames, whatever they announce. */
  elements: Uint8Array = NO_ELEMENTS;
  positions: Float64Array = NO_POSITIONS;
  isotopes: Uint16Array | null = null;
  labels: (string | null)[] | null = null;
  read = 0;
  extra = -1;

  comment: string | null = null;
  extended = false;
  keys: ReadonlyMap<string, ExtendedEntry> = NO_KEYS;
  oddities: ReadonlyMap<CommentOddity, string> = NO_ODDITIES;
  commentLikeAtom = false;
  layout: Layout | null = PLAIN_LAYOUT;
  fault: BuilderFault | null = null;

  dummies = 0;
  /** First line where it happened, 0 for never. */
  numbersForSymbols = 0;
  carets = 0;
  substitutions = 0;
  commaLines = 0;
  /** What was open and read as the choices say, the first line of each kind. */
  open: ReadonlyMap<Ask, OpenReading> = NOTHING_OPEN;
  capitals: readonly OpenCapitals[] = NO_CAPITALS;
  /** Atoms whose numbers have decimal commas, and what was wrong with the first of them. */
  commaAtoms: ReadonlySet<number> = NO_ATOMS;
  commaFault: BuilderFault | null = null;
  readonly choices: ReadingChoices;

  constructor(countLine: CountLine, line: number, choices: ReadingChoices = {}) {
    this.choices = choices;
    this.count = countLine.count;
    this.countLine = countLine;
    this.line = line;
  }

  /** Places for all atoms announced; to be called before they are written. */
  makeRoom(): void {
    if (this.elements.length === this.count) return;
    this.elements = new Uint8Array(this.count);
    this.positions = new Float64Array(3 * this.count);
  }

  get complete(): boolean {
    return this.comment !== null && this.read >= this.count;
  }

  /** True while the next line may be read straight from bytes. */
  get plain(): boolean {
    return (
      this.comment !== null &&
      this.fault === null &&
      this.commaLines === 0 &&
      this.layout !== null &&
      isPlainOrder(this.layout)
    );
  }

  /** The comment line. */
  takeComment(line: TextLine): void {
    this.comment = line.text;
    if (line.text.includes("\u2212") && /\u2212[.\d]/.test(line.text)) this.substitutions = line.number;
    this.extended = hasProperties(line.text);
    if (!this.extended && !line.text.includes("=")) {
      this.commentLikeAtom = looksLikeAtom(line.text, PLAIN_LAYOUT);
      return;
    }
    const parsed = parseExtendedComment(line.text);
    if ("fault" in parsed) {
      if (!this.extended) return;
      const message = `The comment line announces “Properties” but does not parse: ${parsed.fault.reason}.`;
      this.#refuseLayout(line, "X36", message, parsed.fault.column);
      return;
    }
    this.keys = parsed.keys;
    if (!this.extended) {
      // Words of plain text are no keys.
      this.keys = new Map([...parsed.keys].filter(([, entry]) => hasValue(entry)));
      if (parsed.assignedTwice !== null) this.oddities = new Map([["key-twice", parsed.assignedTwice]]);
      return;
    }
    this.oddities = parsed.oddities;
    const properties = parsed.keys.get("Properties");
    const layout = properties ? parseProperties(properties.text) : { reason: "it cannot be found" };
    if ("reason" in layout) this.#refuseLayout(line, "X31", `“Properties” cannot be used: ${layout.reason}.`);
    else {
      this.layout = layout;
      this.extra = (layout.columns ?? 4) - 4;
    }
  }

  #refuseLayout(line: TextLine, code: string, message: string, column?: number): void {
    this.layout = null;
    const hint = "Correct the comment line, or leave Properties out for plain element, x, y, z.";
    const found = line.text.slice(0, 200);
    this.fault = { code, reason: "unreadable", message, hint, found, column, line: line.number };
  }

  /**
   * The next atom line.
   *
   * @returns false where it is none: blank, text, the count of the next frame
   */
  takeAtom(line: TextLine): boolean {
    if (this.layout === null) {
      // Nothing is known of the columns: only keep in step.
      if (!/\S[ \t]+\S/.test(line.text)) return false;
      this.read += 1;
      return true;
    }
    let result = readAtomLine(line.text, this.layout, position, 0);
    if (result.kind !== "atom") {
      const fault = result.kind === "fault" ? result.fault : null;
      result = this.#readOpen(line, this.layout) ?? result;
      if (fault && this.commaAtoms.has(this.read)) {
        this.commaFault ??= { ...fault, line: line.number, atom: this.read + 1 };
      }
    }
    if (result.kind === "other") return false;
    if (result.kind === "fault") this.#note({ ...result.fault, line: line.number, atom: this.read + 1 });
    else this.#put(result.atom, line);
    this.read += 1;
    return true;
  }

  /** The line as the choices say to read it, where it leaves something open. */
  #readOpen(line: TextLine, layout: Layout): AtomLine | null {
    const { read, choices } = this;
    const found = readOpenLine(line.text, layout, position, read, choices);
    if (found === null) return null;
    for (const one of found.open) {
      if (one.ask === "decimal-comma") this.#noteComma(read);
      if (!this.open.has(one.ask)) this.noteOpen({ ...one, line: line.number });
    }
    if (found.capitals) this.#noteCapitals({ atom: read, ...found.capitals });
    return found.result;
  }

  noteOpen(reading: OpenReading): void {
    if (this.open === NOTHING_OPEN) this.open = new Map();
    (this.open as Map<Ask, OpenReading>).set(reading.ask, reading);
  }

  #noteComma(atom: number): void {
    if (this.commaAtoms === NO_ATOMS) this.commaAtoms = new Set();
    (this.commaAtoms as Set<number>).add(atom);
  }

  #noteCapitals(capitals: OpenCapitals): void {
    if (this.capitals === NO_CAPITALS) this.capitals = [];
    (this.capitals as OpenCapitals[]).push(capitals);
  }

  #note(fault: BuilderFault): void {
    this.fault ??= fault;
  }

  #put(atom: ReadAtom, line: TextLine): void {
    const k = this.read;
    this.makeRoom();
    this.positions.set(position, 3 * k);
    this.elements[k] = atom.z;
    this.#putName(k, atom, line.number);
    if (atom.caret) this.carets ||= line.number;
    if (atom.substituted) this.substitutions ||= line.number;
    this.#checkCommas(atom, line);
    if (this.extra < atom.extra) this.extra = atom.extra;
  }

  /** From the fast path; its plain layout has no column of labels. */
  name(k: number, token: string, parsed: NamedElement): void {
    this.#putName(k, makeAtom(parsed, token, null), this.line + 2 + k);
  }

  #putName(k: number, atom: NamedAtom, line: number): void {
    if (atom.isotope !== 0) {
      this.isotopes ??= new Uint16Array(this.count);
      this.isotopes[k] = atom.isotope;
    }
    if (atom.label !== null) {
      this.labels ??= new Array<string | null>(this.count).fill(null);
      this.labels[k] = atom.label;
    }
    if (atom.dummy) this.dummies += 1;
    if (atom.byNumber && this.layout === PLAIN_LAYOUT) this.numbersForSymbols ||= line;
  }

  /** Commas are decimal ones in all of a frame or in none: beside numbers with points one is a slip (row X22). */
  checkDecimals(): void {
    if (this.commaAtoms.size === 0) return;
    const points = this.positions.some(
      (value, k) => !Number.isInteger(value) && !this.commaAtoms.has(Math.floor(k / 3)),
    );
    if (points && this.commaFault) this.#note(this.commaFault);
  }

  /** Commas separate in every line or in none. */
  #checkCommas(atom: ReadAtom, line: TextLine): void {
    if (atom.commas !== this.commaLines > 0 && this.read > 0) {
      this.#note({
        code: "X21",
        reason: "unreadable",
        message: "Commas separate the columns in some lines of the frame only.",
        hint: "Write all lines the same way.",
        found: line.text.slice(0, 200),
        line: line.number,
        atom: this.read + 1,
      });
    }
    if (atom.commas) this.commaLines ||= line.number;
  }

  /** Per-atom columns beyond element and position: named by Properties, or only counted. */
  extraColumns(): readonly ExtraColumn[] {
    if (this.layout === null || (this.layout === PLAIN_LAYOUT && this.extra <= 0)) return NO_COLUMNS;
    if (this.layout !== PLAIN_LAYOUT) return this.layout.extra;
    return Array.from({ length: this.extra }, () => ({ name: null, type: "R", count: 1 }));
  }
}
