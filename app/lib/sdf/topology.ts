import { perceiveBondOrders } from "../chem/bond-orders.ts";
import type { AtomFault } from "../xyz/atom-line.ts";
import { AROMATIC } from "./bond-types.ts";
import { impliedHydrogens } from "./implied-hydrogens.ts";
import type { RecordBuilder } from "./record-builder.ts";

/** What a record says of its molecule beside coordinates, ready for frames to share. */
export interface Topology {
  readonly elements: Uint8Array;
  readonly isotopes: Uint16Array | null;
  readonly charges: Int8Array | null;
  readonly radicals: Uint8Array | null;
  readonly valences: Int8Array | null;
  /** Triples as read, by which records are compared. */
  readonly triples: Int32Array;
  readonly bonds: Int32Array;
  readonly orders: Uint8Array | null;
  readonly charge: number;
  readonly multiplicity: number | null;
  readonly fault: AtomFault | null;
  readonly remarks: readonly { readonly code: string; readonly message: string }[];
}

/** Bond orders are looked for in so many different molecules of a file; one that holds more is no ensemble. */
const PERCEIVED = 8;

/** Works out the topology of records; equal ones in a row cost a comparison and share their arrays. */
export class Topologies {
  #last: Topology | null = null;
  #perceived = 0;

  of(builder: RecordBuilder): Topology {
    const last = this.#last;
    if (last && isSame(builder, last)) return last;
    this.#last = this.#make(builder);
    return this.#last;
  }

  #make(builder: RecordBuilder): Topology {
    const triples = builder.bonds.slice(0, 3 * builder.bondsRead);
    const { bonds, types, twice } = sortBonds(triples, builder.count);
    const base = {
      elements: builder.elements.slice(),
      isotopes: withoutZeros(builder.isotopes),
      charges: withoutZeros(builder.charges),
      radicals: withoutZeros(builder.radicals),
      valences: builder.valences,
    };
    const remarks: { code: string; message: string }[] = [];
    if (twice) {
      const message = `The bond of atoms ${twice[0] + 1} and ${twice[1] + 1} stands twice; the first counts.`;
      remarks.push({ code: "S01", message });
    }
    const loose = types.reduce((sum, type) => sum + Number(type > AROMATIC), 0);
    if (loose > 0) {
      const what =
        loose === 1
          ? "One bond is a coordination or hydrogen bond"
          : `${loose} bonds are coordination or hydrogen bonds`;
      remarks.push({ code: "S08", message: `${what}; bonds of the ensemble come from the distances.` });
    }
    const implied = impliedHydrogens({ ...base, bonds, types });
    const plain = implied.certain && this.#isWrittenPlain(base.elements, bonds, types);
    if (plain) {
      const message = "All bonds are written as single; their orders are found by valence.";
      remarks.push({ code: "S12", message });
    }
    return {
      ...base,
      triples,
      bonds,
      orders: plain ? null : types,
      charge: base.charges?.reduce((sum, charge) => sum + charge, 0) ?? 0,
      multiplicity: multiplicityOf(base.radicals),
      fault: implied.certain && !plain ? withoutHydrogens(implied.total) : null,
      remarks,
    };
  }

  /**
   * Some writers know no bond orders and write every bond as single: then what looks like missing hydrogens are missing
   * double bonds. Believed where orders exist that satisfy every valence without a chain of double bonds, as a bare
   * carbon skeleton would need.
   */
  #isWrittenPlain(elements: Uint8Array, bonds: Int32Array, types: Uint8Array): boolean {
    if (types.some((type) => type !== 1) || !elements.includes(1) || this.#perceived >= PERCEIVED)
      return false;
    this.#perceived += 1;
    const found = perceiveBondOrders(elements, bonds);
    if (found === null || found.charges.some((charge) => charge !== 0)) return false;
    const doubles = new Uint8Array(elements.length);
    found.orders.forEach((order, k) => {
      if (order < 2) return;
      doubles[bonds[2 * k]!]! += 1;
      doubles[bonds[2 * k + 1]!]! += 1;
    });
    return doubles.every((count, atom) => count < 2 || elements[atom] !== 6);
  }
}

function withoutHydrogens(count: number): AtomFault {
  return {
    code: "S12",
    reason: "unclear",
    message: count === 1 ? "One hydrogen has no coordinates." : `${count} hydrogens have no coordinates.`,
    hint: "The bonds leave room for hydrogens that are not listed. Write them with coordinates; if a charge was left out instead, add it (M  CHG).",
  };
}

function isSame(builder: RecordBuilder, last: Topology): boolean {
  return (
    sameArray(builder.elements, last.elements) &&
    3 * builder.bondsRead === last.triples.length &&
    sameArray(last.triples, builder.bonds) &&
    sameMarks(builder.isotopes, last.isotopes) &&
    sameMarks(builder.charges, last.charges) &&
    sameMarks(builder.radicals, last.radicals) &&
    sameMarks(builder.valences, last.valences)
  );
}

/** @param b at least as long as `a`; what lies beyond is not looked at */
function sameArray(a: ArrayLike<number>, b: ArrayLike<number>): boolean {
  if (b.length < a.length) return false;
  for (let k = 0; k < a.length; k++) if (a[k] !== b[k]) return false;
  return true;
}

function sameMarks(own: ArrayLike<number> | null, last: ArrayLike<number> | null): boolean {
  if (own === null || last === null) return own === last;
  return sameArray(own, last);
}

function withoutZeros<List extends Uint16Array | Int8Array | Uint8Array>(list: List | null): List | null {
  return list?.some((value) => value !== 0) ? list : null;
}

function multiplicityOf(radicals: Uint8Array | null): number | null {
  const own = radicals?.filter((radical) => radical !== 0) ?? [];
  return own.length === 1 ? own[0]! : null;
}

/** Pairs i < j sorted by i then j, with their types; of a pair that stands twice the first. */
function sortBonds(
  triples: Int32Array,
  atoms: number,
): { bonds: Int32Array; types: Uint8Array; twice: [number, number] | null } {
  const count = triples.length / 3;
  const first = (k: number) => Math.min(triples[3 * k]!, triples[3 * k + 1]!);
  const second = (k: number) => Math.max(triples[3 * k]!, triples[3 * k + 1]!);
  // The place in the file behind the pair: of equal pairs the first comes first.
  const keys = Float64Array.from(
    { length: count },
    (_, k) => (first(k) * atoms + second(k)) * count + k,
  ).sort();
  const bonds = new Int32Array(2 * count);
  const types = new Uint8Array(count);
  let twice: [number, number] | null = null;
  let kept = 0;
  for (const key of keys) {
    const k = key % count;
    const [i, j] = [first(k), second(k)];
    if (kept > 0 && bonds[2 * kept - 2] === i && bonds[2 * kept - 1] === j) {
      twice ??= [i, j];
      continue;
    }
    bonds[2 * kept] = i;
    bonds[2 * kept + 1] = j;
    types[kept] = triples[3 * k + 2]!;
    kept += 1;
  }
  return { bonds: bonds.slice(0, 2 * kept), types: types.slice(0, kept), twice };
}
