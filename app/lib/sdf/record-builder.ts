import type { NamedAtom } from "../xyz/atom-line.ts";
import type { BuilderFault, TextLine } from "../xyz/frame-builder.ts";
import type { Counts } from "./counts-line.ts";

/** A remark without its place in the upload. */
export interface RecordRemark {
  readonly code: string;
  readonly line: number;
  readonly message: string;
  readonly found?: string;
  readonly hint?: string;
}

/** The lines of a record before its counts. */
export interface RecordHead {
  /** First line of the record, blank ones before the title left out. */
  readonly line: number;
  readonly title: string;
  readonly program: string;
  readonly comment: string;
}

/** Arrays that the records of a file use one after the other. */
export interface RecordRoom {
  elements: Uint8Array;
  bonds: Int32Array;
}

/**
 * One MOL block in the making, whichever its version. The first fault settles the record, as its lines are known to
 * end at the next delimiter.
 */
export class RecordBuilder {
  readonly #room: RecordRoom;
  readonly head: RecordHead;
  /** The counts line, or the record's first where there is none. */
  readonly line: number;
  readonly version: "V2000" | "V3000";
  chiralFlag: boolean;
  /** Atoms and bonds announced; of V3000 known from its own counts line. */
  count = 0;
  bondCount = 0;
  elements: Uint8Array = new Uint8Array(0);
  positions: Float64Array = new Float64Array(0);
  /** Atoms, bonds read so far. */
  read = 0;
  bondsRead = 0;
  /** Triples of first atom, second atom (from 0) and type, as written. */
  bonds: Int32Array = new Int32Array(0);

  isotopes: Uint16Array | null = null;
  labels: (string | null)[] | null = null;
  charges: Int8Array | null = null;
  radicals: Uint8Array | null = null;
  /** Bonds of an atom, those to hydrogens without position counted, where the file states them; -1 where it does not. */
  valences: Int8Array | null = null;

  /** Masses that symbols say, such as D: no list of masses takes them back. */
  readonly symbolMasses = new Map<number, number>();
  dummies = 0;
  /** First line where it happened, 0 for never. */
  substitutions = 0;
  looseBonds = 0;
  fault: BuilderFault | null = null;
  readonly remarks: RecordRemark[] = [];

  /** @param room arrays to write into; what is in them is taken over by `Topologies` before the next record */
  constructor(head: RecordHead, counts: Counts | null, line: number, room: RecordRoom) {
    this.head = head;
    this.line = line;
    this.version = counts?.version ?? "V2000";
    this.chiralFlag = counts?.chiralFlag ?? false;
    this.#room = room;
    if (counts?.version === "V2000") this.announce(counts.atoms, counts.bonds);
  }

  /** What the counts say; makes room. The caller has held them against the limits. */
  announce(atoms: number, bonds: number): void {
    this.count = atoms;
    this.bondCount = bonds;
    this.positions = new Float64Array(3 * atoms);
    const room = this.#room;
    if (room.elements.length !== atoms) room.elements = new Uint8Array(atoms);
    // A count of bonds is not held against a limit: room grows as they come.
    if (room.bonds.length < 3 * Math.min(bonds, 1000)) room.bonds = new Int32Array(3 * Math.min(bonds, 1000));
    this.elements = room.elements;
    this.bonds = room.bonds;
  }

  refuse(fault: BuilderFault): void {
    this.fault ??= fault;
  }

  /** Element, isotope and name of an atom. */
  putName(atom: number, named: NamedAtom): void {
    this.elements[atom] = named.z;
    if (named.isotope !== 0) {
      this.setIsotope(atom, named.isotope);
      this.symbolMasses.set(atom, named.isotope);
    }
    if (named.label !== null) this.setLabel(atom, named.label);
    if (named.dummy) this.dummies += 1;
  }

  setIsotope(atom: number, mass: number): void {
    this.isotopes ??= new Uint16Array(this.count);
    this.isotopes[atom] = mass;
  }

  setLabel(atom: number, label: string): void {
    this.labels ??= new Array<string | null>(this.count).fill(null);
    this.labels[atom] = label;
  }

  setCharge(atom: number, charge: number): void {
    if (charge === 0 && this.charges === null) return;
    this.charges ??= new Int8Array(this.count);
    this.charges[atom] = charge;
  }

  setRadical(atom: number, radical: number): void {
    if (radical === 0 && this.radicals === null) return;
    this.radicals ??= new Uint8Array(this.count);
    this.radicals[atom] = radical;
  }

  setValence(atom: number, valence: number): void {
    this.valences ??= new Int8Array(this.count).fill(-1);
    this.valences[atom] = valence;
  }

  /** Puts the atoms into another order: the one that is `order[k]` so far becomes atom k. */
  reorder(order: readonly number[]): void {
    const placeOf = new Int32Array(order.length);
    order.forEach((old, place) => {
      placeOf[old] = place;
    });
    const { elements, positions, isotopes, charges, radicals, valences, labels } = this;
    this.elements = elements.map((_, k) => elements[order[k]!]!);
    this.positions = positions.map((_, k) => positions[3 * order[Math.floor(k / 3)]! + (k % 3)]!);
    this.isotopes = isotopes?.map((_, k) => isotopes[order[k]!]!) ?? null;
    this.charges = charges?.map((_, k) => charges[order[k]!]!) ?? null;
    this.radicals = radicals?.map((_, k) => radicals[order[k]!]!) ?? null;
    this.valences = valences?.map((_, k) => valences[order[k]!]!) ?? null;
    this.labels = labels?.map((_, k) => labels[order[k]!] ?? null) ?? null;
    for (let k = 0; k < 3 * this.bondsRead; k++) {
      if (k % 3 < 2) this.bonds[k] = placeOf[this.bonds[k]!]!;
    }
  }

  /** The next bond, its atoms from 0; types beyond 4 are remarked on where they are no query. */
  putBond(a: number, b: number, type: number, line: TextLine): void {
    const at = 3 * this.bondsRead;
    if (at + 3 > this.bonds.length) {
      this.bonds = grown(this.bonds);
      this.#room.bonds = this.bonds;
    }
    this.bonds[at] = a;
    this.bonds[at + 1] = b;
    this.bonds[at + 2] = type;
    this.bondsRead += 1;
    if (type > 4) this.looseBonds ||= line.number;
  }
}

function grown(list: Int32Array): Int32Array {
  const room = new Int32Array(Math.max(96, 2 * list.length));
  room.set(list);
  return room;
}
