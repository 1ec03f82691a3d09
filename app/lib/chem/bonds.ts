import type { Elements } from "../structure.ts";
import { BondCheck } from "./bond-check.ts";
import { COVALENT_RADII } from "./elements.ts";
import { Grid } from "./grid.ts";

/** Bonded up to this multiple of the summed covalent radii. */
export const BOND_FACTOR = 1.2;
/** Beyond a bond and up to this multiple a distance is contested: reported, not bonded. */
export const CONTESTED_FACTOR = 1.35;
/** No two atoms of a molecule come nearer than this, in Å. */
export const TOO_CLOSE = 0.5;

/** Above this number of atoms a grid finds the neighbours; below, looking at every pair is as fast. */
const GRID_FROM = 200;
/** Frames that are looked at in full after the check on equal bonds has failed; doubles with every failure. */
const MOST_IN_FULL = 64;

/** Elements that hydrogens bridge (boranes, alanes, metal hydrides): there two bonds to one H are real. */
const bridged = (z: number): boolean =>
  !(
    z === 1 ||
    (z >= 6 && z <= 9) ||
    (z >= 14 && z <= 17) ||
    (z >= 32 && z <= 35) ||
    (z >= 51 && z <= 53) ||
    z === 85
  );

/** Bonds of one geometry. */
export interface Bonds {
  /** Pairs i < j, sorted by i then j, flat. */
  bonds: Int32Array;
  /** Pairs in the contested band, as `bonds`. */
  contested: Int32Array;
  /** Shared protons, flat triples: hydrogen, partner kept, other partner. */
  shared: Int32Array;
  /** The nearest pair where it is nearer than 0.5 Å. */
  closest: { i: number; j: number; distance: number } | null;
}

/**
 * Bonds of one frame by distance: bonded where 0.5 Å < d <= 1.20 (r_i + r_j), contested up to 1.35 (r_i + r_j),
 * with the covalent radii of Dalton Trans. 2008, 2832. Dummies bond to nothing.
 *
 * The factor 1.20 keeps the 1.87 Å across bicyclo[1.1.1]pentane unbonded (a limit of 1.82 Å). A proton between two
 * partners, both in the contested band, is shared and kept with the nearer (as a multiple of the summed radii); so is
 * a hydrogen with two bonds by the rule, unless a partner is boron or a metal, where hydrogens bridge.
 *
 * @param positions Å, packed x y z; `offset` is the index of the frame's first number
 * @example perceiveBonds(Uint8Array.of(8, 1, 1), [0, 0, 0, 0.96, 0, 0, -0.24, 0.93, 0]).bonds // 0 1 0 2
 */
export function perceiveBonds(elements: Elements, positions: ArrayLike<number>, offset = 0): Bonds {
  const finder = new BondFinder(elements);
  finder.find(positions, offset);
  return {
    bonds: finder.bonds.slice(0, 2 * finder.bondCount),
    contested: finder.contested.slice(0, 2 * finder.contestedCount),
    shared: finder.shared.slice(0, 3 * finder.sharedCount),
    closest:
      finder.closestDistance < TOO_CLOSE
        ? { i: finder.closestI, j: finder.closestJ, distance: finder.closestDistance }
        : null,
  };
}

/**
 * The same for many frames of one list of elements, without allocation: `find` fills `bonds` and the rest, of which
 * the first `bondCount` pairs (and so on) are valid until the next call. See `perceiveBonds` for the rule.
 */
export class BondFinder {
  bonds: Int32Array = new Int32Array(0);
  bondCount = 0;
  contested: Int32Array = new Int32Array(0);
  contestedCount = 0;
  shared: Int32Array = new Int32Array(0);
  sharedCount = 0;
  closestI = -1;
  closestJ = -1;
  /** Of any two atoms that are no dummies; Infinity when all pairs are at least 0.5 Å apart. */
  closestDistance = Infinity;

  private readonly elements: Elements;
  private readonly atoms: Int32Array;
  private readonly kinds: Uint8Array;
  /** Squared limits by pair of kinds. */
  private readonly bondLimit: Float64Array;
  private readonly contestedLimit: Float64Array;
  private readonly kindCount: number;
  private readonly reach: number;
  private readonly hydrogens: Int32Array;
  private readonly degree: Int32Array;
  private readonly near: Int32Array;
  private readonly xyz: Float64Array;
  private grid: Grid | null = null;
  /** Knows the bonds in `bonds`, where they came from a frame that had nothing else to tell of. */
  private check: BondCheck | null = null;
  private clean = false;
  private inFull = 0;
  private failures = 0;

  constructor(elements: Elements) {
    this.elements = elements;
    const kindsOf = [...new Set(elements)].filter((z) => z > 0);
    this.kindCount = kindsOf.length;
    this.kinds = Uint8Array.from(elements, (z) => Math.max(0, kindsOf.indexOf(z)));
    this.bondLimit = new Float64Array(this.kindCount ** 2);
    this.contestedLimit = new Float64Array(this.kindCount ** 2);
    let reach = TOO_CLOSE;
    kindsOf.forEach((za, a) => {
      kindsOf.forEach((zb, b) => {
        const ra = COVALENT_RADII[za]!;
        const rb = COVALENT_RADII[zb]!;
        const sum = ra === 0 || rb === 0 ? 0 : ra + rb;
        this.bondLimit[a * this.kindCount + b] = (BOND_FACTOR * sum) ** 2;
        this.contestedLimit[a * this.kindCount + b] = (CONTESTED_FACTOR * sum) ** 2;
        reach = Math.max(reach, CONTESTED_FACTOR * sum);
      });
    });
    this.reach = reach;
    const all = Array.from(elements, (_, a) => a);
    this.atoms = Int32Array.from(all.filter((a) => elements[a] !== 0));
    this.hydrogens = Int32Array.from(all.filter((a) => elements[a] === 1));
    this.degree = new Int32Array(elements.length);
    this.near = new Int32Array(elements.length);
    this.xyz = new Float64Array(3 * this.atoms.length);
  }

  /** @param offset index of the frame's first number in `positions` */
  find(positions: ArrayLike<number>, offset = 0): void {
    this.contestedCount = 0;
    this.sharedCount = 0;
    this.closestDistance = Infinity;
    this.degree.fill(0);
    this.near.fill(0);
    const { atoms, xyz } = this;
    for (let a = 0; a < atoms.length; a++) {
      const from = offset + 3 * atoms[a]!;
      xyz[3 * a] = positions[from]!;
      xyz[3 * a + 1] = positions[from + 1]!;
      xyz[3 * a + 2] = positions[from + 2]!;
    }
    if (this.isAsBefore()) return;
    this.check = null;
    this.bondCount = 0;
    if (atoms.length > GRID_FROM) this.findByGrid();
    else this.findByPairs();
    for (let k = 0; k < this.hydrogens.length; k++) {
      const h = this.hydrogens[k]!;
      if (this.degree[h]! > 1) this.keepNearest(h, this.bonds, this.bondCount);
      else if (this.degree[h] === 0 && this.near[h]! > 1) {
        this.keepNearest(h, this.contested, this.contestedCount);
      }
    }
    this.clean = this.contestedCount === 0 && this.sharedCount === 0 && this.closestDistance === Infinity;
  }

  /** Most frames have the bonds of the frame before: then `bonds` stays as it is. */
  private isAsBefore(): boolean {
    if (this.inFull > 0) {
      this.inFull -= 1;
      return false;
    }
    if (!this.clean) return false;
    this.check ??= this.makeCheck();
    if (this.check.holds(this.xyz)) {
      this.failures = 0;
      return true;
    }
    this.inFull = Math.min(MOST_IN_FULL, 2 ** this.failures) - 1;
    this.failures = Math.min(10, this.failures + 1);
    return false;
  }

  private makeCheck(): BondCheck {
    const { atoms, elements, kinds, kindCount } = this;
    const local = new Int32Array(elements.length);
    atoms.forEach((atom, k) => {
      local[atom] = k;
    });
    const pairOf = (a: number, b: number) => kinds[atoms[a]!]! * kindCount + kinds[atoms[b]!]!;
    const rule = {
      count: atoms.length,
      isHydrogen: (a: number) => elements[atoms[a]!] === 1,
      bondLimit: (a: number, b: number) => this.bondLimit[pairOf(a, b)]!,
      contestedLimit: (a: number, b: number) => this.contestedLimit[pairOf(a, b)]!,
      tooClose: TOO_CLOSE,
    };
    return new BondCheck(
      rule,
      this.bonds.subarray(0, 2 * this.bondCount).map((atom) => local[atom]!),
    );
  }

  private findByPairs(): void {
    const { xyz, kinds, atoms, kindCount, contestedLimit } = this;
    const reach2 = this.reach ** 2;
    const count = atoms.length;
    for (let a = 0; a < count; a++) {
      const x = xyz[3 * a]!;
      const y = xyz[3 * a + 1]!;
      const z = xyz[3 * a + 2]!;
      const row = kinds[atoms[a]!]! * kindCount;
      for (let b = a + 1, k = 3 * a + 3; b < count; b++, k += 3) {
        const dx = xyz[k]! - x;
        const dy = xyz[k + 1]! - y;
        const dz = xyz[k + 2]! - z;
        const d2 = dx * dx + dy * dy + dz * dz;
        if (d2 > reach2) continue;
        const pair = row + kinds[atoms[b]!]!;
        if (d2 <= contestedLimit[pair]! || d2 < TOO_CLOSE * TOO_CLOSE) this.note(a, b, pair, d2);
      }
    }
  }

  private findByGrid(): void {
    this.grid ??= new Grid(this.atoms.length);
    const { xyz, kinds, atoms, kindCount, contestedLimit } = this;
    this.grid.pairsWithin(xyz, this.reach, (a, b, d2) => {
      const pair = kinds[atoms[a]!]! * kindCount + kinds[atoms[b]!]!;
      if (d2 <= contestedLimit[pair]! || d2 < TOO_CLOSE * TOO_CLOSE) this.note(a, b, pair, d2);
    });
    sortPairs(this.bonds, this.bondCount, this.elements.length);
    sortPairs(this.contested, this.contestedCount, this.elements.length);
  }

  private note(a: number, b: number, pair: number, d2: number): void {
    const i = this.atoms[a]!;
    const j = this.atoms[b]!;
    if (d2 <= TOO_CLOSE * TOO_CLOSE) {
      const distance = Math.sqrt(d2);
      if (d2 < TOO_CLOSE * TOO_CLOSE && distance < this.closestDistance) {
        this.closestI = Math.min(i, j);
        this.closestJ = Math.max(i, j);
        this.closestDistance = distance;
      }
    } else if (d2 <= this.bondLimit[pair]!) {
      this.bonds = withPair(this.bonds, this.bondCount++, i, j);
      this.degree[i]! += 1;
      this.degree[j]! += 1;
    } else {
      this.contested = withPair(this.contested, this.contestedCount++, i, j);
      this.near[i]! += 1;
      this.near[j]! += 1;
    }
  }

  /** Leaves a hydrogen that stands between several atoms of `pairs` one bond, to the nearest of them. */
  private keepNearest(h: number, pairs: Int32Array, count: number): void {
    let best = -1;
    let other = -1;
    let bestRatio = Infinity;
    let otherRatio = Infinity;
    for (let k = 0; k < count; k++) {
      const i = pairs[2 * k]!;
      const j = pairs[2 * k + 1]!;
      if (i !== h && j !== h) continue;
      const partner = i === h ? j : i;
      if (bridged(this.elements[partner]!)) return;
      const ratio = this.ratio(h, partner);
      if (ratio < bestRatio) {
        other = best;
        otherRatio = bestRatio;
        best = partner;
        bestRatio = ratio;
      } else if (ratio < otherRatio) {
        other = partner;
        otherRatio = ratio;
      }
    }
    this.shared = withTriple(this.shared, this.sharedCount++, h, best, other);
    if (pairs === this.contested) {
      this.contestedCount = removePairs(this.contested, this.contestedCount, h, best, true);
      this.bonds = withPair(this.bonds, this.bondCount++, Math.min(h, best), Math.max(h, best));
    } else {
      this.moveToContested(h, best);
      this.bondCount = removePairs(this.bonds, this.bondCount, h, best, false);
      sortPairs(this.contested, this.contestedCount, this.elements.length);
    }
    sortPairs(this.bonds, this.bondCount, this.elements.length);
  }

  private moveToContested(h: number, kept: number): void {
    for (let k = 0; k < this.bondCount; k++) {
      const i = this.bonds[2 * k]!;
      const j = this.bonds[2 * k + 1]!;
      if ((i === h && j !== kept) || (j === h && i !== kept)) {
        this.contested = withPair(this.contested, this.contestedCount++, i, j);
      }
    }
  }

  /** Distance of two atoms of the last frame as a multiple of their summed radii. */
  ratio(i: number, j: number): number {
    return this.distance(i, j) / (COVALENT_RADII[this.elements[i]!]! + COVALENT_RADII[this.elements[j]!]!);
  }

  /** Distance of two atoms of the last frame in Å; neither may be a dummy. */
  distance(i: number, j: number): number {
    const a = 3 * this.atoms.indexOf(i);
    const b = 3 * this.atoms.indexOf(j);
    return Math.hypot(
      this.xyz[a]! - this.xyz[b]!,
      this.xyz[a + 1]! - this.xyz[b + 1]!,
      this.xyz[a + 2]! - this.xyz[b + 2]!,
    );
  }
}

function withPair(list: Int32Array, at: number, i: number, j: number): Int32Array {
  const room = 2 * at + 2 <= list.length ? list : grown(list);
  room[2 * at] = i;
  room[2 * at + 1] = j;
  return room;
}

function withTriple(list: Int32Array, at: number, i: number, j: number, k: number): Int32Array {
  const room = 3 * at + 3 <= list.length ? list : grown(list);
  room.set([i, j, k], 3 * at);
  return room;
}

function grown(list: Int32Array): Int32Array {
  const room = new Int32Array(Math.max(64, 2 * list.length));
  room.set(list);
  return room;
}

/** Takes out pairs of `h` in place: the one with `partner`, or all but that one; returns the new count. */
function removePairs(list: Int32Array, count: number, h: number, partner: number, thatOne: boolean): number {
  let kept = 0;
  for (let k = 0; k < count; k++) {
    const i = list[2 * k]!;
    const j = list[2 * k + 1]!;
    const ofH = i === h || j === h;
    const withPartner = ofH && (i === partner || j === partner);
    if (thatOne ? withPartner : ofH && !withPartner) continue;
    list[2 * kept] = i;
    list[2 * kept + 1] = j;
    kept += 1;
  }
  return kept;
}

function sortPairs(list: Int32Array, count: number, atoms: number): void {
  const keys = new Float64Array(count);
  for (let k = 0; k < count; k++) keys[k] = list[2 * k]! * atoms + list[2 * k + 1]!;
  keys.sort();
  for (let k = 0; k < count; k++) {
    list[2 * k] = Math.floor(keys[k]! / atoms);
    list[2 * k + 1] = keys[k]! % atoms;
  }
}
