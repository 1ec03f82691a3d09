import { symbolOf } from "../chem/elements.ts";
import { bondSum } from "../sdf/bond-types.ts";
import { impliedHydrogens } from "../sdf/implied-hydrogens.ts";
import type { BondOrders } from "../sdf/orders.ts";
import { exactNumber } from "./xyz-writer.ts";

/** A molecule as its MOL blocks have it in common. */
export interface BlockMolecule {
  readonly elements: ArrayLike<number>;
  /** Mass numbers, 0 where none is given; null without any. */
  readonly isotopes: ArrayLike<number> | null;
  /** Names of the atoms beyond their element. */
  readonly labels: readonly (string | null)[] | null;
  /** Pairs i < j, sorted, flat. */
  readonly bonds: ArrayLike<number>;
  readonly orders: BondOrders;
}

/** A written block, up to and with its line `M  END`. */
export interface MolBlock {
  readonly text: string;
  readonly version: "V2000" | "V3000";
  /** False where the block rounds a coordinate: V2000 has room for four decimals. */
  readonly exact: boolean;
}

/** Atoms and bonds for which V2000 has room. */
const MOST = 999;
/** Symbol of a dummy atom. */
const DUMMY = "Xx";
/** Pairs of a property line. */
const PAIRS = 8;
/** Longest V3000 line, its beginning and the mark of continuation left out. */
const V30_LENGTH = 72;

const three = (value: number) => String(value).padStart(3);

/**
 * A function that writes the MOL blocks of one molecule, V2000 to 999 atoms and bonds, else V3000; V3000 too where a
 * coordinate needs more than ten columns. The chiral flag is 1, so that readers take the configuration from the
 * coordinates, and atoms whose bonds would make a reader add hydrogens state their valence. V3000 holds coordinates to
 * the last digit, but no names of atoms.
 *
 * @throws RangeError, from the function, where coordinates do not fit the atoms
 * @example molBlockWriter(molecule)("water", positions).text // "water\n  Lowlying          3D\n\n  3  2 ..."
 */
export function molBlockWriter(
  molecule: BlockMolecule,
): (title: string, positions: ArrayLike<number>) => MolBlock {
  const marks = atomMarks(molecule);
  const atoms = molecule.elements.length;
  const large = atoms > MOST || molecule.bonds.length / 2 > MOST;
  const frame = large ? null : v2000Frame(molecule, marks);
  let v30: V30Frame | null = null;
  return (title, positions) => {
    if (positions.length !== 3 * atoms) {
      throw new RangeError(`${positions.length / 3} positions for ${atoms} atoms.`);
    }
    const head = `${titleLine(title)}\n  Lowlying          3D\n\n`;
    const block = frame && v2000Atoms(frame, positions);
    if (frame && block) {
      const text = `${head}${frame.counts}\n${block.text}${frame.rest}`;
      return { text, version: "V2000", exact: block.exact };
    }
    v30 ??= v3000Frame(molecule, marks);
    return { text: head + v3000Text(v30, positions), version: "V3000", exact: true };
  };
}

/** One line that no reader takes for the end of a record or the start of another format. */
function titleLine(title: string): string {
  const line = oneLine(title);
  return line.startsWith("$") ? ` ${line}` : line;
}

/** Characters that end a line, or steer a screen, as blanks. */
export function oneLine(text: string): string {
  return text.replace(/[\p{Cc}\u2028\u2029]+/gu, " ");
}

interface AtomMarks {
  readonly symbols: readonly string[];
  /** Stated number of bonds where it must be said, else -1. */
  readonly valences: Int8Array;
}

function atomMarks({ elements, bonds, orders }: BlockMolecule): AtomMarks {
  const symbols = Array.from(elements, (z) => (z === 0 ? DUMMY : symbolOf(z)));
  const { orders: types, charges, radicals } = orders;
  const implied = impliedHydrogens({ elements, bonds, types, charges, radicals, valences: null });
  const typesAt: number[][] = symbols.map(() => []);
  for (let k = 0; k < bonds.length; k++) typesAt[bonds[k]!]!.push(types[k >> 1]!);
  const valences = new Int8Array(symbols.length).fill(-1);
  implied.counts.forEach((count, atom) => {
    if (count > 0) valences[atom] = Math.min(14, bondSum(typesAt[atom]!));
  });
  return { symbols, valences };
}

// --- V2000 ------------------------------------------------------------------------------------------

interface V2000Frame {
  readonly counts: string;
  /** What follows the coordinates in each atom line, its end included. */
  readonly tails: readonly string[];
  /** Bonds, properties and the end. */
  readonly rest: string;
}

function v2000Frame(molecule: BlockMolecule, { symbols, valences }: AtomMarks): V2000Frame {
  const { bonds, orders } = molecule;
  const counts = `${three(symbols.length)}${three(bonds.length / 2)}  0  0  1  0  0  0  0  0999 V2000`;
  const tails = symbols.map((symbol, atom) => {
    const stated = valences[atom]!;
    const valence = three(stated < 0 ? 0 : stated === 0 ? 15 : stated);
    return ` ${symbol.padEnd(3)} 0  0  0  0  0${valence}  0  0  0  0  0  0\n`;
  });
  const lines = Array.from(orders.orders, (order, k) => {
    return `${three(bonds[2 * k]! + 1)}${three(bonds[2 * k + 1]! + 1)}${three(order)}  0\n`;
  });
  const rest = [...lines, ...propertyLines(molecule), "M  END\n"].join("");
  return { counts, tails, rest };
}

function propertyLines({ orders, isotopes, labels }: BlockMolecule): string[] {
  const names = (labels ?? []).flatMap((label, atom) => {
    const name = label === null ? "" : oneLine(label).trim();
    return name === "" ? [] : [`V  ${three(atom + 1)} ${name}\n`];
  });
  return [
    ...names,
    ...listLines("CHG", orders.charges),
    ...listLines("RAD", orders.radicals),
    ...listLines("ISO", isotopes),
  ];
}

function listLines(kind: string, values: ArrayLike<number> | null): string[] {
  const pairs = Array.from(values ?? [], (value, atom) => ({ value, atom })).filter(
    ({ value }) => value !== 0,
  );
  const lines: string[] = [];
  for (let from = 0; from < pairs.length; from += PAIRS) {
    const part = pairs.slice(from, from + PAIRS);
    const text = part.map(({ value, atom }) => ` ${three(atom + 1)} ${three(value)}`).join("");
    lines.push(`M  ${kind}${three(part.length)}${text}\n`);
  }
  return lines;
}

/** Null where a coordinate does not fit into ten columns. */
function v2000Atoms(
  frame: V2000Frame,
  positions: ArrayLike<number>,
): { text: string; exact: boolean } | null {
  let text = "";
  let exact = true;
  for (let atom = 0; atom < frame.tails.length; atom++) {
    for (let axis = 0; axis < 3; axis++) {
      const value = positions[3 * atom + axis]!;
      const written = Object.is(value, -0) ? "-0.0000" : value.toFixed(4);
      if (written.length > 10) return null;
      if (!Object.is(Number(written), value)) exact = false;
      text += written.padStart(10);
    }
    text += frame.tails[atom];
  }
  return { text, exact };
}

// --- V3000 ------------------------------------------------------------------------------------------

interface V30Frame {
  readonly symbols: readonly string[];
  /** What follows the coordinates of each atom. */
  readonly keys: readonly string[];
  readonly before: string;
  readonly after: string;
}

function v3000Frame(molecule: BlockMolecule, { symbols, valences }: AtomMarks): V30Frame {
  const { bonds, orders, isotopes } = molecule;
  const count = bonds.length / 2;
  const keys = symbols.map((_, atom) => {
    const stated = valences[atom]!;
    const entries: [string, number][] = [
      ["CHG", orders.charges?.[atom] ?? 0],
      ["RAD", orders.radicals?.[atom] ?? 0],
      ["MASS", isotopes?.[atom] ?? 0],
      ["VAL", stated < 0 ? 0 : stated === 0 ? -1 : stated],
    ];
    return entries.map(([key, value]) => (value === 0 ? "" : ` ${key}=${value}`)).join("");
  });
  const before = [
    "  0  0  0     0  0            999 V3000",
    "M  V30 BEGIN CTAB",
    `M  V30 COUNTS ${symbols.length} ${count} 0 0 1`,
    "M  V30 BEGIN ATOM",
  ];
  const lines = Array.from(orders.orders, (order, k) => {
    return v30Line(`${k + 1} ${order} ${bonds[2 * k]! + 1} ${bonds[2 * k + 1]! + 1}`);
  });
  const bondBlock = count === 0 ? "" : `M  V30 BEGIN BOND\n${lines.join("")}M  V30 END BOND\n`;
  const after = `M  V30 END ATOM\n${bondBlock}M  V30 END CTAB\nM  END\n`;
  return { symbols, keys, before: `${before.join("\n")}\n`, after };
}

function v3000Text({ symbols, keys, before, after }: V30Frame, positions: ArrayLike<number>): string {
  const lines = symbols.map((symbol, atom) => {
    const axes = [0, 1, 2].map((axis) => exactNumber(positions[3 * atom + axis]!)).join(" ");
    return v30Line(`${atom + 1} ${symbol} ${axes} 0${keys[atom]}`);
  });
  return before + lines.join("") + after;
}

/** Lines of the format end at 80 characters; a dash continues them. */
function v30Line(text: string): string {
  let rest = text;
  let lines = "";
  while (rest.length > V30_LENGTH) {
    const cut = rest.lastIndexOf(" ", V30_LENGTH - 1) + 1;
    lines += `M  V30 ${rest.slice(0, cut)}-\n`;
    rest = rest.slice(cut);
  }
  return `${lines}M  V30 ${rest}\n`;
}
