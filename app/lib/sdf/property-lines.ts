import type { AtomFault } from "../xyz/atom-line.ts";
import type { BuilderFault, TextLine } from "../xyz/frame-builder.ts";
import { fieldName } from "./data-fields.ts";
import { misplaced, queryFeature } from "./faults.ts";
import type { RecordBuilder } from "./record-builder.ts";

/** The last line of a block. */
export const BLOCK_END = /^M\s+END\s*$/;

/** Properties that ask instead of state. */
const QUERY_LINES = /^M {2}(?:ALS|LIN|LOG|RBC|RGP|SUB|UNS)/;
const LISTED = /^M {2}(CHG|RAD|ISO)/;

/** The lines of a V2000 block behind its bonds, up to its end. */
export class PropertyLines {
  readonly #builder: RecordBuilder;
  /** Lines that belong to the one before, whatever they hold. */
  #passing = 0;
  #aliasOf = -1;
  #charged = false;
  #massed = false;

  constructor(builder: RecordBuilder) {
    this.#builder = builder;
  }

  /**
   * The next line.
   *
   * @returns true at the end of the block
   */
  take(line: TextLine): boolean {
    const { text } = line;
    if (this.#passing > 0) {
      this.#passing -= 1;
      this.#takeAlias(text);
      return false;
    }
    if (BLOCK_END.test(text)) return true;
    const fault = this.#takeProperty(text);
    if (fault) this.#builder.refuse({ ...fault, line: line.number });
    return false;
  }

  #takeProperty(text: string): AtomFault | BuilderFault | null {
    const listed = LISTED.exec(text)?.[1];
    if (listed) return this.#takeList(listed, text);
    if (QUERY_LINES.test(text)) return queryFeature("The record asks instead of stating.", text);
    if (fieldName(text) !== null) return unended();
    if (/^[AG] {2}[ \d]/.test(text)) {
      // An alias names one atom; a group abbreviation, of old files, only has its text passed over.
      this.#aliasOf = text.startsWith("A") ? Number(text.slice(3, 6)) - 1 : -1;
      this.#passing = 1;
    } else if (/^V {2}[ \d]{3} /.test(text)) {
      this.#aliasOf = Number(text.slice(3, 6)) - 1;
      this.#takeAlias(text.slice(7));
    } else if (/^S {2}SKP/.test(text)) this.#passing = Number(/^S {2}SKP *(\d{1,3})/.exec(text)?.[1] ?? 0);
    else if (/^[ \d]{2}\d[ \d]{2}\d[ \d]{2}\d/.test(text)) {
      return misplaced("S01", `More bonds follow than the count of ${this.#builder.bondCount}.`, text);
    }
    return null;
  }

  #takeAlias(text: string): void {
    const label = text.trim();
    const atom = this.#aliasOf;
    this.#aliasOf = -1;
    if (label !== "" && atom >= 0 && atom < this.#builder.count)
      this.#builder.setLabel(atom, label.slice(0, 200));
  }

  /**
   * `M  CHG`, `M  RAD`, `M  ISO`: a count, then atom and value in turn, each with a blank before it. The first one
   * takes the place of all that the atom block says of charges and radicals, or of masses (row S09).
   */
  #takeList(kind: string, text: string): AtomFault | null {
    const builder = this.#builder;
    if (kind === "ISO") this.#forgetMasses();
    else this.#forgetCharges();
    const numbers = text.slice(6).trim().split(/\s+/).map(Number);
    const [count = 0, ...pairs] = numbers;
    if (numbers.some((value) => !Number.isInteger(value)) || pairs.length < 2 * count) {
      return misplaced("S09", `The line M  ${kind} is no list of atoms and values.`, text);
    }
    for (let k = 0; k < count; k++) {
      const atom = pairs[2 * k]! - 1;
      const value = pairs[2 * k + 1]!;
      if (atom < 0 || atom >= builder.count) {
        return misplaced("S09", `The line M  ${kind} names atom ${atom + 1} of ${builder.count}.`, text);
      }
      const fault = putValue(builder, kind, atom, value, text);
      if (fault) return fault;
    }
    return null;
  }

  #forgetCharges(): void {
    if (this.#charged) return;
    this.#charged = true;
    this.#builder.charges = null;
    this.#builder.radicals = null;
  }

  /** D and T stay what they are: there the symbol says it. */
  #forgetMasses(): void {
    if (this.#massed) return;
    this.#massed = true;
    const { isotopes, elements, symbolMasses } = this.#builder;
    if (isotopes === null) return;
    for (let atom = 0; atom < elements.length; atom++) isotopes[atom] = symbolMasses.get(atom) ?? 0;
  }
}

/** Also for `CHG=`, `RAD=` and `MASS=` of V3000. */
export function putValue(
  builder: RecordBuilder,
  kind: string,
  atom: number,
  value: number,
  found: string,
): AtomFault | null {
  switch (kind) {
    case "CHG":
      if (Math.abs(value) > 15) return misplaced("S09", "Charges run from -15 to 15.", found);
      builder.setCharge(atom, value);
      return null;
    case "RAD":
      if (value < 0 || value > 3) return misplaced("S09", "Radicals are 1, 2 or 3.", found);
      builder.setRadical(atom, value);
      return null;
    default:
      if (value < 0 || value > 400)
        return misplaced("S07", "The mass of an isotope is no mass number.", found);
      builder.setIsotope(atom, value);
      return null;
  }
}

function unended(): AtomFault {
  return {
    code: "S14",
    reason: "unreadable",
    message: "Data begin before the line M  END of the structure.",
    hint: "Write the record again; a structure ends with the line M  END.",
  };
}
