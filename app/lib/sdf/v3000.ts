import { parseNumber, plainBlanksAndMinus } from "../intake/numbers.ts";
import { type LineBuffer, MAX_LINE_BYTES } from "../text/lines.ts";
import { type AtomFault, splitFields } from "../xyz/atom-line.ts";
import type { BuilderFault, TextLine } from "../xyz/frame-builder.ts";
import { bondTypeFault } from "./bond-types.ts";
import { fieldName } from "./data-fields.ts";
import { readFastAtoms3000, readFastBonds3000 } from "./fast-v3000.ts";
import { isFault, misplaced, queryFeature, readCoordinate, readSymbol } from "./faults.ts";
import { BLOCK_END, putValue } from "./property-lines.ts";
import type { RecordBuilder } from "./record-builder.ts";

const PREFIX = "M  V30 ";
/** Properties of an atom that ask instead of state. */
const QUERY_KEYS = new Set(["HCOUNT", "SUBST", "UNSAT", "RBCNT"]);

/** The lines of a V3000 block behind its counts line, up to its end (row S05). */
export class V3000Lines {
  readonly #builder: RecordBuilder;
  /** Holds the announced atoms against the limit. */
  readonly #checkAtoms: (atoms: number, written: string) => void;
  /** Blocks that are open, the innermost last. */
  readonly #blocks: string[] = [];
  /** What a line ending in `-` leaves for the next. */
  #continued: { readonly text: string; readonly line: number } | null = null;
  /** Indices of the atoms as read, and places by index; null while they count up from 1. */
  #indices: number[] | null = null;
  readonly #places = new Map<number, number>();
  #counted = false;

  constructor(builder: RecordBuilder, checkAtoms: (atoms: number, written: string) => void) {
    this.#builder = builder;
    this.#checkAtoms = checkAtoms;
  }

  /** Reads what it can straight from the bytes. */
  takeFast(lines: LineBuffer): void {
    if (this.#continued !== null || this.#indices !== null) return;
    const builder = this.#builder;
    const block = this.#blocks.at(-1);
    if (block === "ATOM") readFastAtoms3000(lines, builder);
    else if (block === "BOND" && builder.read >= builder.count) readFastBonds3000(lines, builder);
  }

  /**
   * The next line.
   *
   * @returns true at the end of the block
   */
  take(line: TextLine): boolean {
    if (BLOCK_END.test(line.text)) {
      this.#end(line);
      return true;
    }
    const fault = this.#takeLine(line);
    if (fault) this.#builder.refuse("line" in fault ? fault : { ...fault, line: line.number });
    return false;
  }

  #takeLine(line: TextLine): AtomFault | BuilderFault | null {
    const text = line.text.trimEnd();
    if (text === "" && this.#continued === null) return null;
    if (!text.startsWith(PREFIX.trimEnd())) {
      if (fieldName(text) !== null) {
        return misplaced("S14", "Data begin before the line M  END of the structure.", text);
      }
      return misplaced("S05", "Every line of a V3000 structure begins with “M  V30”.", text);
    }
    const from = this.#continued;
    const whole = (from?.text ?? "") + text.slice(PREFIX.length);
    if (whole.length > MAX_LINE_BYTES) {
      return misplaced("G11", "A line with its continuations is longer than the limit of 1 MiB.");
    }
    if (whole.endsWith("-")) {
      this.#continued = { text: whole.slice(0, -1), line: from?.line ?? line.number };
      return null;
    }
    this.#continued = null;
    const start = from?.line ?? line.number;
    const fault = this.#takeJoined({ text: plainBlanksAndMinus(whole), number: start });
    if (plainBlanksAndMinus(whole) !== whole) this.#builder.substitutions ||= start;
    const atom = this.#blocks.at(-1) === "ATOM" ? { atom: this.#builder.read + 1 } : {};
    return fault && { ...fault, ...atom, line: start };
  }

  #takeJoined(line: TextLine): AtomFault | null {
    const fields = splitValues(line.text);
    const [first = "", second = ""] = fields;
    if (first === "BEGIN") return this.#begin(second, line.text);
    if (first === "END") {
      if (this.#blocks.pop() === second) return null;
      return misplaced("S05", `“END ${second}” closes no block.`, line.text);
    }
    switch (this.#blocks.at(-1)) {
      case "CTAB":
        if (first === "LINKNODE") return queryFeature("A part of the record repeats.", line.text);
        return first === "COUNTS" ? this.#takeCounts(fields, line.text) : null;
      case "ATOM":
        return this.#takeAtom(fields, line.text);
      case "BOND":
        return this.#takeBond(fields, line);
      default:
        return null;
    }
  }

  #begin(block: string, found: string): AtomFault | null {
    this.#blocks.push(block);
    if (block === "RGROUP") return queryFeature("The record lists rests instead of one structure.", found);
    if (this.#blocks.length > 16) return misplaced("S05", "Blocks are nested too deep.", found);
    const needsCounts = (block === "ATOM" || block === "BOND") && !this.#counted;
    return needsCounts ? misplaced("S05", "The counts of atoms and bonds are missing.", found) : null;
  }

  #takeCounts(fields: readonly string[], found: string): AtomFault | null {
    const [, atoms, bonds, , , chiral] = fields;
    if (!/^\d{1,9}$/.test(atoms ?? "") || !/^\d{1,9}$/.test(bonds ?? "") || this.#counted) {
      return misplaced("S05", "The line COUNTS should hold the numbers of atoms and bonds, once.", found);
    }
    this.#checkAtoms(Number(atoms), atoms ?? "");
    this.#builder.announce(Number(atoms), Number(bonds));
    this.#builder.chiralFlag = chiral === "1";
    this.#counted = true;
    return null;
  }

  /** `index symbol x y z map [KEY=value ...]` */
  #takeAtom(fields: readonly string[], found: string): AtomFault | null {
    const builder = this.#builder;
    const atom = builder.read;
    const [index = "", symbol = ""] = fields;
    if (atom >= builder.count) {
      return misplaced("S05", `More atoms follow than the count of ${builder.count}.`, found);
    }
    if (fields.length < 5 || !/^\d{1,9}$/.test(index)) {
      return misplaced("S05", `Here atom ${atom + 1} should stand: index, symbol, x, y, z.`, found);
    }
    if (!this.#putIndex(Number(index), atom)) {
      return misplaced("S05", `Two atoms have the index ${index}.`, found);
    }
    const unquoted = symbol.replace(/^"(.*)"$/, "$1");
    const named = readSymbol(unquoted, 1);
    if (isFault(named)) return { ...named, column: undefined };
    for (let axis = 0; axis < 3; axis++) {
      const reading = readCoordinate(fields[2 + axis]!, axis, null);
      if (typeof reading !== "number") return reading;
      builder.positions[3 * atom + axis] = reading;
    }
    builder.putName(atom, named);
    const fault = this.#takeKeys(atom, fields.slice(5), found);
    builder.read += 1;
    return fault;
  }

  /** False where another atom has the index. */
  #putIndex(index: number, atom: number): boolean {
    if (this.#indices === null) {
      if (index === atom + 1) return true;
      this.#indices = Array.from({ length: atom }, (_, k) => k + 1);
      for (let k = 0; k < atom; k++) this.#places.set(k + 1, k);
    }
    if (this.#places.has(index)) return false;
    this.#places.set(index, atom);
    this.#indices.push(index);
    return true;
  }

  /** Undefined where no atom has the index. */
  #placeOf(index: number): number | undefined {
    if (this.#indices !== null) return this.#places.get(index);
    return index >= 1 && index <= this.#builder.read ? index - 1 : undefined;
  }

  #takeKeys(atom: number, pairs: readonly string[], found: string): AtomFault | null {
    for (const pair of pairs) {
      const at = pair.indexOf("=");
      const key = pair.slice(0, Math.max(at, 0)).toUpperCase();
      const text = pair.slice(at + 1);
      if (QUERY_KEYS.has(key) && text !== "0")
        return queryFeature("The atom asks instead of stating.", found);
      if (key !== "CHG" && key !== "RAD" && key !== "MASS" && key !== "VAL") continue;
      const value = parseNumber(text);
      if (value === null || !Number.isInteger(value)) {
        return misplaced("S05", `${key} should be a whole number.`, pair);
      }
      if (key === "VAL") this.#builder.setValence(atom, value === -1 ? 0 : Math.min(Math.max(value, 0), 15));
      else {
        const fault = putValue(this.#builder, key, atom, value, pair);
        if (fault) return fault;
      }
    }
    return null;
  }

  /** `index type atom atom [KEY=value ...]` */
  #takeBond(fields: readonly string[], line: TextLine): AtomFault | null {
    const builder = this.#builder;
    const [index, type, a, b] = fields
      .slice(0, 4)
      .map((text) => (/^\d{1,9}$/.test(text) ? Number(text) : -1));
    if (builder.bondsRead >= builder.bondCount) {
      return misplaced("S05", `More bonds follow than the count of ${builder.bondCount}.`, line.text);
    }
    if (fields.length < 4 || index === -1 || type == null || type < 0 || a == null || b == null) {
      const bond = builder.bondsRead + 1;
      return misplaced("S05", `Here bond ${bond} should stand: index, type and two atoms.`, line.text);
    }
    const from = this.#placeOf(a);
    const to = this.#placeOf(b);
    if (from === undefined || to === undefined || from === to) {
      const message = "A bond names an atom that the record does not have, or one atom twice.";
      return misplaced("S05", message, line.text);
    }
    const fault = bondTypeFault(type, line.text);
    if (fault === null) builder.putBond(from, to, type, line);
    return fault;
  }

  #end(line: TextLine): void {
    const builder = this.#builder;
    if (builder.fault) return;
    const { read, count, bondsRead, bondCount } = builder;
    if (
      !this.#counted ||
      this.#continued ||
      read < count ||
      bondsRead < bondCount ||
      this.#blocks.length > 0
    ) {
      const message = `The structure ends with ${read} of its ${count} atoms and ${bondsRead} of its ${bondCount} bonds, or inside a block.`;
      builder.refuse({ ...misplaced("S05", message), line: line.number });
      return;
    }
    this.#sortByIndex();
  }

  /** Atoms in the order of their indices, whatever the order of their lines. */
  #sortByIndex(): void {
    const indices = this.#indices;
    if (indices === null || indices.every((index, k) => k === 0 || index > indices[k - 1]!)) return;
    const order = indices.map((_, k) => k).sort((j, k) => indices[j]! - indices[k]!);
    this.#builder.reorder(order);
  }
}

/** Words apart by blanks; what stands in brackets or quotes is one word. */
function splitValues(text: string): string[] {
  if (!/["(]/.test(text)) return splitFields(text).map((field) => field.text);
  const words: string[] = [];
  let word = "";
  let depth = 0;
  let quoted = false;
  for (const c of text) {
    if (c === '"') quoted = !quoted;
    else if (c === "(" && !quoted) depth += 1;
    else if (c === ")" && !quoted) depth -= 1;
    if (c === " " && depth <= 0 && !quoted) {
      if (word !== "") words.push(word);
      word = "";
    } else word += c;
  }
  if (word !== "") words.push(word);
  return words;
}
