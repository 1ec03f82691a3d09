/** Which columns of an atom line mean what, from `Properties=` or from the plain form `El x y z`. */

/** A per-atom column beyond element, position and label; its values are not read yet. */
export interface ExtraColumn {
  /** Null where the file gives none: the user may name it. */
  readonly name: string | null;
  /** S text, I whole number, R real, L logical. */
  readonly type: "S" | "I" | "R" | "L";
  /** Adjacent columns that form it: 3 for a vector. */
  readonly count: number;
}

export interface Layout {
  /** Null where `El x y z` may be followed by any number of columns. */
  readonly columns: number | null;
  /** Index of the column with the element. */
  readonly species: number;
  /** Index of the first of the three columns with the position. */
  readonly position: number;
  /** Index of a column with atom labels, or null. */
  readonly label: number | null;
  readonly extra: readonly ExtraColumn[];
}

export const PLAIN_LAYOUT: Layout = { columns: null, species: 0, position: 1, label: null, extra: [] };

/** Text columns that name the atoms. */
const LABEL_NAMES = new Set(["label", "labels", "name", "names", "atom_label", "atom_name"]);

/** Columns beyond these are a table, not a structure (row G11). */
export const MAX_COLUMNS = 1000;

/**
 * Reads the value of `Properties`: triples of name, type and count in any order (row X30).
 *
 * @returns a reason in words where it cannot be used (row X31)
 * @example parseProperties("species:S:1:pos:R:3:forces:R:3") // columns 7, one extra column "forces"
 */
export function parseProperties(value: string): Layout | { reason: string } {
  const parts = value.split(":");
  if (parts.length % 3 !== 0) return { reason: "it is no list of name:type:count" };
  const extra: ExtraColumn[] = [];
  let columns = 0;
  let species: number | null = null;
  let position: number | null = null;
  let label: number | null = null;
  for (let k = 0; k < parts.length; k += 3) {
    const [name = "", type = "", countText = ""] = parts.slice(k, k + 3);
    if (type !== "S" && type !== "I" && type !== "R" && type !== "L") {
      return { reason: `the type “${type}” of “${name}” is none of S, I, R and L` };
    }
    if (!/^[1-9]\d{0,3}$/.test(countText))
      return { reason: `“${countText}” columns of “${name}” is no count` };
    const count = Number(countText);
    if (name === "pos" && type === "R" && count === 3 && position === null) position = columns;
    else if (isSpecies(name, type) && count === 1 && species === null) species = columns;
    else {
      if (type === "S" && count === 1 && LABEL_NAMES.has(name.toLowerCase()) && label === null)
        label = columns;
      extra.push({ name, type, count });
    }
    columns += count;
  }
  if (position === null) return { reason: "it has no pos:R:3" };
  if (species === null) return { reason: "it has neither species:S:1 nor Z:I:1" };
  return { columns, species, position, label, extra };
}

function isSpecies(name: string, type: string): boolean {
  return (name === "species" && type === "S") || (name === "Z" && type === "I");
}

/** True where lines begin `El x y z`, so that they can be read straight from bytes. */
export function isPlainOrder(layout: Layout): boolean {
  return layout.species === 0 && layout.position === 1 && layout.label === null;
}
