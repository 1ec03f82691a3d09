/**
 * Bond orders perceived from elements and connectivity alone, by valence: for drawings, never for identity or RMSD.
 */

export interface PerceivedOrders {
  /** 1, 2 or 3 for each bond, in the order of the bonds. */
  orders: Uint8Array;
  /** Formal charge for each atom. */
  charges: Int8Array;
}

/** Bonds that a neutral atom makes, smallest first; textbook valences. */
const VALENCES: Record<number, readonly number[]> = {
  1: [1],
  5: [3],
  6: [4],
  7: [3],
  8: [2],
  9: [1],
  14: [4],
  15: [3, 5],
  16: [2, 4, 6],
  17: [1, 3, 5, 7],
  34: [2, 4, 6],
  35: [1, 3, 5, 7],
  53: [1, 3, 5, 7],
};

/** Steps of the search before it gives up; a drawing then shows the plain graph. */
const WORK_LIMIT = 100_000;
const MAX_ANIONS = 4;

/**
 * Gives every bond an order so that every atom has one of its valences; charges where no neutral structure exists:
 * nitro groups, N-oxides, diazo groups and azides as charge pairs, four-bonded nitrogen as cation, single-bonded
 * oxygen or sulfur as anion. A total charge of 0 is tried first.
 *
 * @param bonds flat pairs of atoms, each once
 * @returns null where no assignment was found within the bound on the work: then nothing is claimed
 * @example perceiveBondOrders([6, 8, 1, 1], [0, 1, 0, 2, 0, 3])?.orders // 2, 1, 1 (formaldehyde)
 */
export function perceiveBondOrders(
  elements: ArrayLike<number>,
  bonds: ArrayLike<number>,
): PerceivedOrders | null {
  const molecule = readMolecule(elements, bonds);
  const charges = new Int8Array(elements.length);
  chargePairs(molecule, charges);
  const surplus = charges.reduce((sum, charge) => sum + charge, 0);
  const sites = anionSites(molecule, charges);
  const budget = { left: WORK_LIMIT };
  const counts = [Math.max(0, surplus), ...Array.from({ length: MAX_ANIONS + 1 }, (_, k) => k)];
  for (const count of new Set(counts)) {
    for (const chosen of subsets(sites, count)) {
      const trial = charges.slice();
      for (const atom of chosen) trial[atom] = -1;
      const orders = assign(molecule, trial, false, budget) ?? assign(molecule, trial, true, budget);
      if (orders !== null) return { orders, charges: trial };
      if (budget.left <= 0) return null;
    }
  }
  return null;
}

interface Molecule {
  elements: ArrayLike<number>;
  pairs: [number, number][];
  /** Bonds of each atom, by number. */
  incident: number[][];
}

function readMolecule(elements: ArrayLike<number>, bonds: ArrayLike<number>): Molecule {
  const pairs: [number, number][] = [];
  const incident: number[][] = Array.from({ length: elements.length }, () => []);
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const pair: [number, number] = [bonds[k]!, bonds[k + 1]!];
    incident[pair[0]]!.push(pairs.length);
    incident[pair[1]]!.push(pairs.length);
    pairs.push(pair);
  }
  return { elements, pairs, incident };
}

function partner(molecule: Molecule, bond: number, atom: number): number {
  const [a, b] = molecule.pairs[bond]!;
  return a === atom ? b : a;
}

/** Charges that no choice of bond orders can avoid. */
function chargePairs(molecule: Molecule, charges: Int8Array): void {
  const { elements, incident } = molecule;
  for (let atom = 0; atom < elements.length; atom++) {
    const degree = incident[atom]!.length;
    if (elements[atom] === 7 && degree === 4) charges[atom] = 1;
    if (elements[atom] === 8 && degree === 3) charges[atom] = 1;
    if (elements[atom] === 5 && degree === 4) charges[atom] = -1;
    if (elements[atom] !== 7) continue;
    const ends = incident[atom]!.map((bond) => partner(molecule, bond, atom)).filter(
      (other) => incident[other]!.length === 1,
    );
    const oxygen = ends.find((other) => elements[other] === 8);
    // R-NO2 and R3N-O: one terminal oxygen takes the electron; a second one is a double bond.
    if (degree >= 3 && oxygen !== undefined) {
      charges[atom] = 1;
      charges[oxygen] = -1;
    }
    // R-N=N=N and R2C=N=N: the inner nitrogen is the cation, the outer one the anion.
    const nitrogen = ends.find((other) => elements[other] === 7);
    if (degree === 2 && nitrogen !== undefined) {
      charges[atom] = 1;
      charges[nitrogen] = -1;
    }
  }
}

/** Single-bonded oxygen and sulfur without hydrogen that could be anions. */
function anionSites(molecule: Molecule, charges: Int8Array): number[] {
  const sites: number[] = [];
  for (let atom = 0; atom < molecule.elements.length; atom++) {
    const z = molecule.elements[atom];
    const chalcogen = z === 8 || z === 16;
    if (chalcogen && charges[atom] === 0 && molecule.incident[atom]!.length === 1) sites.push(atom);
  }
  return sites;
}

function* subsets(items: readonly number[], size: number, from = 0): Generator<number[]> {
  if (size === 0) {
    yield [];
    return;
  }
  for (let k = from; k <= items.length - size; k++) {
    for (const rest of subsets(items, size - 1, k + 1)) yield [items[k]!, ...rest];
  }
}

/** Bonds missing at an atom: every amount that completes one of its valences, smallest first; null for unknown elements. */
function wants(z: number, charge: number, degree: number): number[] | null {
  const neutral = VALENCES[z];
  if (!neutral) return null;
  // A cation of N, O binds once more, an anion once less; boron the other way round.
  const shift = z === 5 ? -charge : charge;
  return neutral.map((valence) => valence + shift - degree).filter((missing) => missing >= 0);
}

/** Depth-first search, the atom with the fewest ways first; aromatic rings resolve without branching in practice. */
function assign(
  molecule: Molecule,
  charges: Int8Array,
  /** Two-bonded sulfur and single-bonded halogens may go beyond their smallest valence; rarely right, so tried last. */
  expanded: boolean,
  budget: { left: number },
): Uint8Array | null {
  const { elements, pairs, incident } = molecule;
  const choices: number[][] = [];
  for (let atom = 0; atom < elements.length; atom++) {
    const degree = incident[atom]!.length;
    const all = wants(elements[atom]!, charges[atom]!, degree);
    const missing = degree > 2 || expanded ? all : (all?.slice(0, 1) ?? null);
    if (missing === null) choices.push([0]);
    else if (missing.length === 0) return null;
    else choices.push(missing);
  }
  const orders = new Uint8Array(pairs.length).fill(1);
  const added = new Int32Array(elements.length);
  return raise(molecule, choices, orders, added, budget) ? orders : null;
}

function raise(
  molecule: Molecule,
  choices: readonly number[][],
  orders: Uint8Array,
  added: Int32Array,
  budget: { left: number },
): boolean {
  budget.left -= 1;
  if (budget.left <= 0) return false;
  const room = (atom: number) => choices[atom]!.at(-1)! - added[atom]!;
  let pick = -1;
  let ways: number[] = [];
  for (let atom = 0; atom < choices.length; atom++) {
    if (choices[atom]!.includes(added[atom]!)) continue;
    const open = molecule.incident[atom]!.filter(
      (bond) => orders[bond]! < 3 && room(partner(molecule, bond, atom)) > 0,
    );
    if (open.length === 0) return false;
    if (pick < 0 || open.length < ways.length) {
      pick = atom;
      ways = open;
      if (ways.length === 1) break;
    }
  }
  if (pick < 0) return true;
  for (const bond of ways) {
    const [a, b] = molecule.pairs[bond]!;
    orders[bond] = orders[bond]! + 1;
    added[a] = added[a]! + 1;
    added[b] = added[b]! + 1;
    if (raise(molecule, choices, orders, added, budget)) return true;
    orders[bond] = orders[bond]! - 1;
    added[a] = added[a]! - 1;
    added[b] = added[b]! - 1;
  }
  return false;
}
