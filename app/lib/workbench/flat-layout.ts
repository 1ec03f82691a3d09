/** A flat drawing of a molecule in pixels: what is left to the page is lines, letters and colours. */

export interface FlatAtom {
  element: number;
  x: number;
  y: number;
  hydrogens: number;
  charge: number;
}

export interface FlatBond {
  from: number;
  to: number;
  order: 1 | 2 | 3;
  /** A wedge begins at `from`. */
  wedge: "up" | "down" | null;
  /** Both sides of a double bond inside a ring, or at a symmetric end, are told by where its neighbours lie. */
  inner: -1 | 0 | 1;
}

export interface FlatLabel {
  x: number;
  y: number;
  element: number;
  symbol: string;
  hydrogens: number;
  charge: number;
  /** Where the hydrogens stand beside the symbol. */
  side: "right" | "left" | "below" | "above";
}

export interface FlatLine {
  x1: number;
  y1: number;
  x2: number;
  y2: number;
}

export interface FlatDrawing {
  width: number;
  height: number;
  lines: FlatLine[];
  /** Corners of filled wedges, as point lists. */
  wedges: string[];
  labels: FlatLabel[];
  /** Where each atom lies, in the order given: for numbers and rings beside the drawing. */
  points: { x: number; y: number }[];
}

const LETTER = 7;
const GAP = 2.6;
const MARGIN = 10;
/** Drawings are not blown up beyond this bond length. */
const BOND = 20;

/** A box in pixels, and how far a drawing in it may grow. */
export interface FlatBox {
  width: number;
  height: number;
  /** Longest bond, 20 px where left out. */
  bond?: number;
  /** Room round the atoms, 10 px where left out. */
  margin?: number;
}

/**
 * Fits atoms and bonds into a box: carbon stays unlabelled where it has a neighbour, bonds stop short of letters,
 * second lines lie on the side of the ring or between equal neighbours.
 *
 * @param symbolOf letters of an element by atomic number
 */
export function flatLayout(
  atoms: readonly FlatAtom[],
  bonds: readonly FlatBond[],
  box: FlatBox,
  symbolOf: (element: number) => string,
): FlatDrawing {
  const placed = fitInto(atoms, bonds, box);
  const labels = placed.points.map((point, k) => labelOf(point, k, atoms, bonds, placed.points, symbolOf));
  const lines: FlatLine[] = [];
  const wedges: string[] = [];
  for (const bond of bonds) {
    const line = shorten(placed.points, labels, bond);
    if (bond.wedge === "up") wedges.push(solidWedge(line));
    else if (bond.wedge === "down") lines.push(...hashes(line));
    else lines.push(...strokes(line, bond));
  }
  return {
    width: placed.width,
    height: placed.height,
    lines,
    wedges,
    labels: labels.filter((label) => label !== null),
    points: placed.points,
  };
}

interface Point {
  x: number;
  y: number;
}

function fitInto(atoms: readonly FlatAtom[], bonds: readonly FlatBond[], box: FlatBox) {
  const margin = box.margin ?? MARGIN;
  const xs = atoms.map((atom) => atom.x);
  const ys = atoms.map((atom) => atom.y);
  const left = Math.min(...xs);
  const top = Math.min(...ys);
  const spanX = Math.max(1e-6, Math.max(...xs) - left);
  const spanY = Math.max(1e-6, Math.max(...ys) - top);
  const lengths = bonds.map((bond) =>
    Math.hypot(atoms[bond.from]!.x - atoms[bond.to]!.x, atoms[bond.from]!.y - atoms[bond.to]!.y),
  );
  const bondLength = lengths.length > 0 ? lengths.reduce((sum, l) => sum + l, 0) / lengths.length : 1;
  const scale = Math.min(
    (box.bond ?? BOND) / Math.max(1e-6, bondLength),
    (box.width - 2 * margin) / spanX,
    (box.height - 2 * margin) / spanY,
  );
  const points: Point[] = atoms.map((atom) => ({
    x: margin + (atom.x - left) * scale,
    y: margin + (atom.y - top) * scale,
  }));
  return { points, width: 2 * margin + spanX * scale, height: 2 * margin + spanY * scale };
}

function labelOf(
  point: Point,
  k: number,
  atoms: readonly FlatAtom[],
  bonds: readonly FlatBond[],
  points: readonly Point[],
  symbolOf: (element: number) => string,
): FlatLabel | null {
  const atom = atoms[k]!;
  const around = bonds.flatMap((bond) => (bond.from === k ? [bond.to] : bond.to === k ? [bond.from] : []));
  if (atom.element === 6 && around.length > 0 && atom.charge === 0) return null;
  const dx = around.reduce((sum, other) => sum + points[other]!.x - point.x, 0);
  const dy = around.reduce((sum, other) => sum + points[other]!.y - point.y, 0);
  // Hydrogens turn away from the bonds; above or below where the atom has bonds on both sides.
  const both =
    around.some((o) => points[o]!.x < point.x - 2) && around.some((o) => points[o]!.x > point.x + 2);
  const side = both ? (dy > 0 ? "above" : "below") : dx > 0.5 ? "left" : "right";
  return {
    ...point,
    element: atom.element,
    symbol: symbolOf(atom.element),
    hydrogens: atom.hydrogens,
    charge: atom.charge,
    side,
  };
}

function shorten(points: readonly Point[], labels: readonly (FlatLabel | null)[], bond: FlatBond): FlatLine {
  const a = points[bond.from]!;
  const b = points[bond.to]!;
  const length = Math.max(1e-6, Math.hypot(b.x - a.x, b.y - a.y));
  const cut = (end: number) => (labels[end] ? Math.min(LETTER, length * 0.4) : 0);
  const t1 = cut(bond.from) / length;
  const t2 = 1 - cut(bond.to) / length;
  return {
    x1: a.x + (b.x - a.x) * t1,
    y1: a.y + (b.y - a.y) * t1,
    x2: a.x + (b.x - a.x) * t2,
    y2: a.y + (b.y - a.y) * t2,
  };
}

function shift(line: FlatLine, by: number, inset: number): FlatLine {
  const dx = line.x2 - line.x1;
  const dy = line.y2 - line.y1;
  const length = Math.max(1e-6, Math.hypot(dx, dy));
  const nx = (-dy / length) * by;
  const ny = (dx / length) * by;
  const ix = (dx / length) * inset;
  const iy = (dy / length) * inset;
  return { x1: line.x1 + nx + ix, y1: line.y1 + ny + iy, x2: line.x2 + nx - ix, y2: line.y2 + ny - iy };
}

function strokes(line: FlatLine, bond: FlatBond): FlatLine[] {
  if (bond.order === 1) return [line];
  if (bond.order === 3) return [line, shift(line, GAP + 0.6, 2), shift(line, -GAP - 0.6, 2)];
  if (bond.inner === 0) return [shift(line, GAP / 1.4, 0), shift(line, -GAP / 1.4, 0)];
  return [line, shift(line, bond.inner * (GAP + 0.8), 3)];
}

function solidWedge(line: FlatLine): string {
  const left = shift(line, 2.6, 0);
  const right = shift(line, -2.6, 0);
  return [
    [line.x1, line.y1],
    [left.x2, left.y2],
    [right.x2, right.y2],
  ]
    .map(([x, y]) => `${x!.toFixed(1)},${y!.toFixed(1)}`)
    .join(" ");
}

function hashes(line: FlatLine): FlatLine[] {
  const bars: FlatLine[] = [];
  const count = 6;
  for (let k = 1; k <= count; k++) {
    const t = k / count;
    const width = 2.8 * t;
    const left = shift(line, width, 0);
    const right = shift(line, -width, 0);
    bars.push({
      x1: left.x1 + (left.x2 - left.x1) * t,
      y1: left.y1 + (left.y2 - left.y1) * t,
      x2: right.x1 + (right.x2 - right.x1) * t,
      y2: right.y1 + (right.y2 - right.y1) * t,
    });
  }
  return bars;
}

/**
 * The side on which the second line of a double bond lies: where more of the neighbours are; 0 draws it in the middle
 * (an end atom such as the oxygen of a carbonyl, or neighbours on both sides alike).
 */
export function innerSide(
  atoms: readonly Point[],
  bonds: readonly { from: number; to: number }[],
  k: number,
): -1 | 0 | 1 {
  const { from, to } = bonds[k]!;
  const a = atoms[from]!;
  const b = atoms[to]!;
  let sum = 0;
  let ends = 0;
  for (const [n, bond] of bonds.entries()) {
    if (n === k) continue;
    for (const [here, there] of [
      [bond.from, bond.to],
      [bond.to, bond.from],
    ] as const) {
      if (here !== from && here !== to) continue;
      ends |= here === from ? 1 : 2;
      const c = atoms[there]!;
      sum += Math.sign((b.x - a.x) * (c.y - a.y) - (b.y - a.y) * (c.x - a.x));
    }
  }
  if (ends !== 3) return 0;
  return sum > 0 ? 1 : sum < 0 ? -1 : 0;
}

/**
 * The direction from an atom in which most room is left between its bonds: where its number stands.
 *
 * @param around places of its neighbours
 * @returns a vector of length 1; upwards for an atom without neighbours
 * @example freeDirection({ x: 0, y: 0 }, [{ x: 1, y: 0 }]) // { x: -1, y: 0 }
 */
export function freeDirection(at: Point, around: readonly Point[]): Point {
  const angles = around.map((other) => Math.atan2(other.y - at.y, other.x - at.x)).sort((a, b) => a - b);
  const first = angles[0];
  if (first === undefined) return { x: 0, y: -1 };
  let widest = { from: 0, width: -1 };
  for (const [k, from] of angles.entries()) {
    const width = (angles[k + 1] ?? first + 2 * Math.PI) - from;
    if (width > widest.width + 1e-9) widest = { from, width };
  }
  const middle = widest.from + widest.width / 2;
  return { x: Math.cos(middle), y: Math.sin(middle) };
}
