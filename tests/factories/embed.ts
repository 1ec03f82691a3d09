import { COVALENT_RADII } from "../../app/lib/chem/elements.ts";
import type { Sketch } from "./smiles.ts";

/**
 * Rough coordinates for a sketched molecule, by springs from a seeded random start: bond lengths by order, angles by
 * the number of neighbours, flat double bonds, hands and sides as asked, everything else apart. Good enough to tell
 * bonds and configuration, for nothing else.
 */
export function embed(molecule: Sketch, seed = 1): Float64Array {
  for (let attempt = 0; attempt < 60; attempt++) {
    const random = mulberry(seed * 1000 + attempt);
    const springs = new Springs(molecule, random);
    if (springs.relax()) return springs.xyz;
  }
  throw new Error("No geometry found; the sketch may be impossible.");
}

/** Seeded numbers in [0, 1). */
export function mulberry(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

interface Spring {
  a: number;
  b: number;
  length: number;
  stiffness: number;
  /** True for contacts, which only push. */
  push: boolean;
  bond: boolean;
}

class Springs {
  xyz: Float64Array;
  private readonly springs: Spring[] = [];
  /** Centre, three neighbours, wanted volume of the three unit-like vectors. */
  private readonly volumes: { atoms: [number, number, number, number]; target: number }[] = [];
  private readonly force: Float64Array;
  private readonly neighbours: number[][];

  constructor(
    private readonly molecule: Sketch,
    random: () => number,
  ) {
    const n = molecule.elements.length;
    const side = 1.6 * Math.cbrt(n) + 1;
    this.xyz = Float64Array.from({ length: 3 * n }, () => side * random());
    this.force = new Float64Array(3 * n);
    this.neighbours = Array.from({ length: n }, () => []);
    molecule.orders.forEach((_, k) => {
      const [a, b] = [molecule.bonds[2 * k]!, molecule.bonds[2 * k + 1]!];
      this.neighbours[a]!.push(b);
      this.neighbours[b]!.push(a);
    });
    this.addSprings();
    this.addVolumes();
  }

  relax(): boolean {
    const speed = new Float64Array(this.xyz.length);
    for (let step = 0; step < 2500; step++) {
      this.force.fill(0);
      const push = Math.min(1, step / 900);
      for (const spring of this.springs) this.pull(spring, push);
      for (const { atoms, target } of this.volumes) this.twist(atoms, target);
      for (let k = 0; k < speed.length; k++) {
        speed[k] = 0.9 * speed[k]! + 0.02 * Math.max(-2, Math.min(2, this.force[k]!));
        this.xyz[k]! += speed[k]!;
      }
    }
    return this.isGood();
  }

  private isGood(): boolean {
    const lengths = this.springs.every((s) => {
      const d = this.distance(s.a, s.b);
      if (s.bond) return Math.abs(d - s.length) < 0.05;
      return s.push ? d > Math.min(0.8 * s.length, 1.9) : Math.abs(d - s.length) < 0.45;
    });
    const hands = this.volumes.every(({ atoms, target }) => {
      const volume = this.volume(atoms);
      return target === 0 ? Math.abs(volume) < 0.25 : volume / target > 0.4;
    });
    return lengths && hands;
  }

  private addSprings(): void {
    const { molecule, neighbours } = this;
    const n = molecule.elements.length;
    const known = new Set<number>();
    const add = (a: number, b: number, length: number, stiffness: number, bond = false): void => {
      if (known.has(Math.min(a, b) * n + Math.max(a, b))) return;
      known.add(Math.min(a, b) * n + Math.max(a, b));
      this.springs.push({ a, b, length, stiffness, push: false, bond });
    };
    molecule.orders.forEach((order, k) => {
      add(molecule.bonds[2 * k]!, molecule.bonds[2 * k + 1]!, this.bondLength(k, order), 4, true);
    });
    for (let at = 0; at < n; at++) {
      const around = neighbours[at]!;
      const cosine = this.angleCosine(at);
      for (const a of around) {
        for (const b of around) {
          if (b <= a || this.smallRing(at, a, b)) continue;
          const [p, q] = [this.lengthOf(at, a), this.lengthOf(at, b)];
          add(a, b, Math.sqrt(p * p + q * q - 2 * p * q * cosine), 1);
        }
      }
    }
    // Far ends of a double bond: 2.9 Å cis and 3.7 Å trans fit carbons; hydrogens are near enough.
    for (const { a, b, cis } of molecule.sides) add(a, b, cis ? 2.9 : 3.7, 1);
    for (let a = 0; a < n; a++) {
      for (let b = a + 1; b < n; b++) {
        if (known.has(a * n + b)) continue;
        const hydrogens = Number(molecule.elements[a] === 1) + Number(molecule.elements[b] === 1);
        this.springs.push({
          a,
          b,
          length: [3.1, 2.6, 2.2][hydrogens]!,
          stiffness: 0.5,
          push: true,
          bond: false,
        });
      }
    }
  }

  private addVolumes(): void {
    for (const [atom, { neighbours, clockwise }] of this.molecule.hands) {
      const hand = (clockwise ? 1 : -1) * (neighbours.length === 3 ? -1 : 1);
      const three = neighbours.slice(-3);
      const size = three.reduce((product, b) => product * this.lengthOf(atom, b), 1);
      this.volumes.push({ atoms: [atom, three[0]!, three[1]!, three[2]!], target: hand * 0.75 * size });
    }
    this.neighbours.forEach((around, atom) => {
      if (around.length !== 3 || !this.hasDouble(atom) || this.molecule.hands.has(atom)) return;
      if (this.molecule.elements[atom]! > 9) return;
      this.volumes.push({ atoms: [atom, around[0]!, around[1]!, around[2]!], target: 0 });
    });
  }

  private pull({ a, b, length, stiffness, push }: Spring, pushing: number): void {
    const { xyz, force } = this;
    const x = xyz[3 * a]! - xyz[3 * b]!;
    const y = xyz[3 * a + 1]! - xyz[3 * b + 1]!;
    const z = xyz[3 * a + 2]! - xyz[3 * b + 2]!;
    const d = Math.sqrt(x * x + y * y + z * z) || 1e-3;
    if (push && d > length) return;
    const size = (2 * stiffness * (push ? pushing : 1) * (length - d)) / d;
    force[3 * a]! += size * x;
    force[3 * a + 1]! += size * y;
    force[3 * a + 2]! += size * z;
    force[3 * b]! -= size * x;
    force[3 * b + 1]! -= size * y;
    force[3 * b + 2]! -= size * z;
  }

  private twist(atoms: [number, number, number, number], target: number): void {
    const [c, p, q, r] = atoms;
    const size = 2 * (target - this.volume(atoms));
    for (const [atom, one, two] of [
      [p, q, r],
      [q, r, p],
      [r, p, q],
    ] as const) {
      const u = this.from(c, one);
      const v = this.from(c, two);
      for (let k = 0; k < 3; k++) {
        const gradient = u[(k + 1) % 3]! * v[(k + 2) % 3]! - u[(k + 2) % 3]! * v[(k + 1) % 3]!;
        this.force[3 * atom + k]! += size * gradient;
        this.force[3 * c + k]! -= size * gradient;
      }
    }
  }

  private volume([c, p, q, r]: [number, number, number, number]): number {
    const [u, v, w] = [this.from(c, p), this.from(c, q), this.from(c, r)];
    return (
      u[0]! * (v[1]! * w[2]! - v[2]! * w[1]!) -
      u[1]! * (v[0]! * w[2]! - v[2]! * w[0]!) +
      u[2]! * (v[0]! * w[1]! - v[1]! * w[0]!)
    );
  }

  private from(a: number, b: number): number[] {
    return [0, 1, 2].map((k) => this.xyz[3 * b + k]! - this.xyz[3 * a + k]!);
  }

  private distance(a: number, b: number): number {
    return Math.hypot(...this.from(a, b));
  }

  private bondLength(k: number, order: number): number {
    const [a, b] = [this.molecule.bonds[2 * k]!, this.molecule.bonds[2 * k + 1]!];
    const sum = COVALENT_RADII[this.molecule.elements[a]!]! + COVALENT_RADII[this.molecule.elements[b]!]!;
    const conjugated = order === 1 && this.hasDouble(a) && this.hasDouble(b) ? 0.05 : 0;
    return sum - [0, 0, 0.19, 0.32][order]! - conjugated;
  }

  private lengthOf(a: number, b: number): number {
    const spring = this.springs.find((s) => s.bond && ((s.a === a && s.b === b) || (s.a === b && s.b === a)));
    if (!spring) throw new Error(`No bond ${a}-${b}`);
    return spring.length;
  }

  private hasDouble(atom: number): boolean {
    const { bonds, orders } = this.molecule;
    return orders.some((o, k) => o > 1 && (bonds[2 * k] === atom || bonds[2 * k + 1] === atom));
  }

  private angleCosine(atom: number): number {
    const { bonds, orders } = this.molecule;
    const pi = orders.reduce(
      (sum, o, k) => sum + (bonds[2 * k] === atom || bonds[2 * k + 1] === atom ? o - 1 : 0),
      0,
    );
    const count = this.neighbours[atom]!.length;
    if (count === 2 && pi === 2 && this.molecule.elements[atom]! < 10) return -1;
    if (count === 3 && pi === 1 && this.molecule.elements[atom]! < 10) return -0.5;
    return pi === 1 && count === 2 ? -0.5 : -1 / 3;
  }

  /** Angles in rings of three, four and five are left to the bonds. */
  private smallRing(at: number, a: number, b: number): boolean {
    const paths = (from: number, to: number, left: number, last: number): boolean =>
      from === to ||
      (left > 0 &&
        this.neighbours[from]!.some((x) => x !== last && x !== at && paths(x, to, left - 1, from)));
    return paths(a, b, 3, at);
  }
}
