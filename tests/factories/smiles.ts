import { SYMBOLS } from "../../app/lib/chem/elements.ts";

/**
 * A small reader of SMILES for tests: organic atoms, brackets with H, charge, isotope and @, branches, ring digits,
 * bond signs, / and \. Aromatic rings are written with alternating double bonds. Hydrogens become atoms, each
 * directly after the atom that carries it.
 */
export interface Sketch {
  elements: Uint8Array;
  isotopes: Uint16Array;
  /** Pairs, flat, and their orders. */
  bonds: number[];
  orders: number[];
  /**
   * Per atom with @ or @@: neighbours in the order written, and whether, seen from the first, the others turn
   * clockwise.
   */
  hands: Map<number, { neighbours: number[]; clockwise: boolean }>;
  /** Double bonds with / or \: a and b on the same side or not. */
  sides: { a: number; i: number; j: number; b: number; cis: boolean }[];
}

const valences: Record<string, number[]> = {
  B: [3],
  C: [4],
  N: [3, 5],
  O: [2],
  P: [3, 5],
  S: [2, 4, 6],
  F: [1],
  Cl: [1],
  Br: [1],
  I: [1],
  Si: [4],
};

interface Draft {
  symbol: string;
  isotope: number;
  hydrogens: number | null;
  hand: "" | "@" | "@@";
  /** Neighbours in writing order: atom numbers, "H", or a ring digit waiting for its partner. */
  written: (number | "H" | { ring: string })[];
}

interface DraftBond {
  from: number;
  to: number;
  order: number;
  slant: number;
}

export function sketch(smiles: string): Sketch {
  const { drafts, bonds } = read(smiles);
  return withHydrogens(drafts, bonds);
}

function read(smiles: string): { drafts: Draft[]; bonds: DraftBond[] } {
  const drafts: Draft[] = [];
  const bonds: DraftBond[] = [];
  const stack: number[] = [];
  const rings = new Map<string, { atom: number; order: number }>();
  const tokens = smiles.match(/\[[^\]]+\]|Cl|Br|Si|[BCNOPSFI]|%\d\d|[()=#/\\.\d-]/g) ?? [];
  if (tokens.join("") !== smiles) throw new Error(`Cannot read ${smiles}`);
  let last = -1;
  let order = 1;
  let slant = 0;
  const join = (from: number, to: number): void => {
    bonds.push({ from, to, order, slant });
    order = 1;
    slant = 0;
  };
  for (const token of tokens) {
    if (token === "(") stack.push(last);
    else if (token === ")") last = stack.pop() ?? -1;
    else if (token === ".") last = -1;
    else if ("=#-/\\".includes(token)) {
      order = token === "=" ? 2 : token === "#" ? 3 : order;
      slant = token === "/" ? 1 : token === "\\" ? -1 : 0;
    } else if (/^[\d%]/.test(token)) {
      const open = rings.get(token);
      if (open) {
        order = Math.max(order, open.order);
        const place = drafts[open.atom]!.written.findIndex((w) => typeof w === "object" && w.ring === token);
        drafts[open.atom]!.written[place] = last;
        drafts[last]!.written.push(open.atom);
        join(open.atom, last);
        rings.delete(token);
      } else {
        rings.set(token, { atom: last, order });
        drafts[last]!.written.push({ ring: token });
        order = 1;
      }
    } else {
      const atom = drafts.push(draft(token)) - 1;
      if (last >= 0) {
        drafts[last]!.written.push(atom);
        drafts[atom]!.written.unshift(last);
        join(last, atom);
      }
      last = atom;
    }
  }
  return { drafts, bonds };
}

function draft(token: string): Draft {
  const bracket = /^\[(\d*)([A-Z][a-z]?)(@{0,2})(H?)(\d*)[+-]?\d?\]$/.exec(token);
  if (!bracket) return { symbol: token, isotope: 0, hydrogens: null, hand: "", written: [] };
  const hydrogens = bracket[4] ? Number(bracket[5] || 1) : 0;
  return {
    symbol: bracket[2] ?? "",
    isotope: Number(bracket[1] || 0),
    hydrogens,
    hand: bracket[3] as Draft["hand"],
    written: new Array<"H">(bracket[3] ? hydrogens : 0).fill("H"),
  };
}

function withHydrogens(drafts: Draft[], bonds: DraftBond[]): Sketch {
  const elements: number[] = [];
  const isotopes: number[] = [];
  const pairs: number[] = [];
  const orders: number[] = [];
  const place: number[] = [];
  const firstHydrogen: number[] = [];
  drafts.forEach((d, k) => {
    const used = bonds.reduce((sum, b) => sum + (b.from === k || b.to === k ? b.order : 0), 0);
    const room = (valences[d.symbol] ?? []).find((v) => v >= used) ?? used;
    place[k] = elements.push(SYMBOLS.indexOf(d.symbol)) - 1;
    isotopes.push(d.isotope);
    firstHydrogen[k] = elements.length;
    for (let h = 0; h < (d.hydrogens ?? room - used); h++) {
      pairs.push(place[k]!, elements.push(1) - 1);
      orders.push(1);
      isotopes.push(0);
    }
  });
  for (const b of bonds) {
    pairs.push(place[b.from]!, place[b.to]!);
    orders.push(b.order);
  }
  const hands: Sketch["hands"] = new Map();
  drafts.forEach((d, k) => {
    if (!d.hand) return;
    const neighbours = d.written.map((w) => (w === "H" ? firstHydrogen[k]! : place[w as number]!));
    hands.set(place[k]!, { neighbours, clockwise: d.hand === "@@" });
  });
  return {
    elements: Uint8Array.from(elements),
    isotopes: Uint16Array.from(isotopes),
    bonds: pairs,
    orders,
    hands,
    sides: sidesOf(bonds, place),
  };
}

/** F/C=C/F is trans: a sign before the double bond speaks of the atom after it, one behind of the atom behind. */
function sidesOf(bonds: DraftBond[], place: number[]): Sketch["sides"] {
  const height = (end: number): { atom: number; up: number } | null => {
    for (const b of bonds) {
      if (b.slant !== 0 && b.to === end) return { atom: b.from, up: -b.slant };
      if (b.slant !== 0 && b.from === end) return { atom: b.to, up: b.slant };
    }
    return null;
  };
  return bonds.flatMap((bond) => {
    const one = bond.order === 2 ? height(bond.from) : null;
    const two = bond.order === 2 ? height(bond.to) : null;
    if (!one || !two) return [];
    const [a, i, j, b] = [one.atom, bond.from, bond.to, two.atom].map((k) => place[k]!);
    return [{ a: a!, i: i!, j: j!, b: b!, cis: one.up === two.up }];
  });
}
