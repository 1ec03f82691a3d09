import type { StereoUnit } from "../chem/refine.ts";
import { ConfigurationComparer, isDouble, toConfiguration } from "../chem/stereo.ts";
import { findStereoUnits } from "../chem/stereo-units.ts";
import { AROMATIC } from "../sdf/bond-types.ts";
import { statedOrders } from "../sdf/orders.ts";
import type { Graph } from "../structure.ts";
import type { BondKind, Hands } from "./frame-kinds.ts";
import type { FrameRecord, MoleculeGroup } from "./frame-record.ts";

/**
 * What most frames have in common: composition and charge, in it the order of atoms, the bonds, the configuration.
 * Ties go to what the earliest frame has.
 *
 * @param records frames with bonds, in file order
 * @returns null without frames
 */
export function chooseGroup(records: readonly FrameRecord[]): MoleculeGroup | null {
  const members = largestComposition(records);
  if (!members) return null;
  const ordered = largest(members.records, (record) => record.shape);
  const bonded = largest(inTheTable(ordered), (record) => record.kind);
  const kind = bonded[0]?.kind;
  if (!kind) return null;
  return {
    elements: [...kind.shape.elements],
    isotopes: [...kind.shape.isotopes],
    bonds: [...kind.graph.bonds],
    ...(kind.seen ? { seen: [...kind.seen] } : {}),
    charge: members.charge,
    multiplicity: members.multiplicity,
    configuration: commonConfiguration(kind, bonded),
  };
}

/**
 * Where files carry a bond table it is the reference, and the distances only check it: frames that bear out the table of
 * most decide before those that do not. All frames where none does, or no file has one.
 */
function inTheTable(records: readonly FrameRecord[]): readonly FrameRecord[] {
  const tables = new Map<string, FrameRecord[]>();
  const keys = new Map<BondKind, string>();
  for (const record of records) {
    const { kind } = record;
    if (kind === null || kind.table === null) continue;
    const key = keys.get(kind) ?? kind.graph.bonds.join();
    keys.set(kind, key);
    const same = tables.get(key);
    if (same) same.push(record);
    else tables.set(key, [record]);
  }
  let most: FrameRecord[] = [];
  for (const same of tables.values()) if (same.length > most.length) most = same;
  const borneOut = most.filter(({ kind }) => kind?.seen === null);
  // Frames without a table that are as many as these have as much to say.
  return 2 * most.length > records.length && borneOut.length > 0 ? borneOut : records;
}

/** Frames of one kind: those of the most frequent one; of equally frequent ones, that met first. */
function largest<K>(records: readonly FrameRecord[], kindOf: (record: FrameRecord) => K): FrameRecord[] {
  const groups = new Map<K, FrameRecord[]>();
  for (const record of records) {
    const kind = kindOf(record);
    const group = groups.get(kind);
    if (group) group.push(record);
    else groups.set(kind, [record]);
  }
  let best: FrameRecord[] = [];
  for (const group of groups.values()) if (group.length > best.length) best = group;
  return best;
}

interface Members {
  records: FrameRecord[];
  charge: number | null;
  multiplicity: number | null;
}

/** The composition with most frames of one charge and multiplicity, frames that state none counting along. */
function largestComposition(records: readonly FrameRecord[]): Members | null {
  const compositions = new Map<string, FrameRecord[]>();
  for (const record of records) {
    const group = compositions.get(record.shape.composition);
    if (group) group.push(record);
    else compositions.set(record.shape.composition, [record]);
  }
  let best: Members | null = null;
  for (const group of compositions.values()) {
    const members = ofOneCharge(group);
    if (members.records.length > (best?.records.length ?? 0)) best = members;
  }
  return best;
}

function ofOneCharge(records: readonly FrameRecord[]): Members {
  const charge = mostFrequent(records.map((record) => record.charge));
  const charged = records.filter((record) => agrees(record.charge, charge));
  const multiplicity = mostFrequent(charged.map((record) => record.multiplicity));
  return {
    records: charged.filter((record) => agrees(record.multiplicity, multiplicity)),
    charge,
    multiplicity,
  };
}

/** Unknown agrees with anything: a writer that leaves the charge out does not say 0. */
export function agrees(own: number | null, group: number | null): boolean {
  return own === null || group === null || own === group;
}

function mostFrequent(values: readonly (number | null)[]): number | null {
  const counts = new Map<number, number>();
  for (const value of values) if (value !== null) counts.set(value, (counts.get(value) ?? 0) + 1);
  let best: number | null = null;
  let most = 0;
  for (const [value, count] of counts) {
    if (count <= most) continue;
    best = value;
    most = count;
  }
  return best;
}

/** Stereo units of a bond kind that are so by the file's bond order or else their mean length, as indices. */
function realUnits(kind: BondKind): number[] {
  const orders = kind.table && statedOrders(kind.graph, kind.table);
  return (kind.units ?? []).flatMap((unit, u) => {
    if (unit.kind === "centre") return [u];
    const order = orders ? orderOf(kind.graph, orders, unit.atoms) : AROMATIC;
    if (order !== AROMATIC) return order === 2 ? [u] : [];
    return isDouble(kind.graph, unit, kind.lengths[u]! / Math.max(1, kind.counted)) ? [u] : [];
  });
}

/** The order of a bond, from the table of its graph. */
function orderOf({ bonds }: Graph, orders: ArrayLike<number>, [i, j]: readonly [number, number]): number {
  for (let k = 0; k < orders.length; k++) {
    if (bonds[2 * k] === Math.min(i, j) && bonds[2 * k + 1] === Math.max(i, j)) return orders[k]!;
  }
  return AROMATIC;
}

function commonConfiguration(
  kind: BondKind,
  records: readonly FrameRecord[],
): MoleculeGroup["configuration"] {
  if (!kind.units) {
    const centres = findStereoUnits(kind.graph).filter((unit) => unit.kind === "centre");
    return toConfiguration(centres, new Int8Array(centres.length));
  }
  const real = realUnits(kind);
  const units: StereoUnit[] = real.map((u) => kind.units![u]!);
  if (units.length === 0) return toConfiguration([], []);
  const votes = new Map<Hands, number>();
  for (const { hands } of records) if (hands) votes.set(hands, (votes.get(hands) ?? 0) + 1);
  const comparer = new ConfigurationComparer(kind.graph, units);
  const classes = new Map<string, { signs: Int8Array; count: number }[]>();
  const all: { signs: Int8Array; count: number }[] = [];
  for (const [hands, count] of votes) {
    const signs = Int8Array.from(real, (u) => hands.signs[u]!);
    const key = comparer.invariant(signs);
    const list = classes.get(key) ?? [];
    classes.set(key, list);
    const known = list.find((one) => comparable(signs, one.signs) && comparer.same(one.signs, signs));
    if (known) {
      known.count += count;
      continue;
    }
    const fresh = { signs, count };
    list.push(fresh);
    all.push(fresh);
  }
  // A pattern with a flat centre says less than a full one; it decides only where there is no other.
  const full = all.filter(({ signs }) => !signs.includes(0));
  let best = full[0] ?? all[0]!;
  for (const one of full.length > 0 ? full : all) if (one.count > best.count) best = one;
  return toConfiguration(units, best.signs);
}

/** Patterns with undefined signs are classes of their own: 0 would fit everything. */
function comparable(a: Int8Array, b: Int8Array): boolean {
  const open = (signs: Int8Array): number => signs.reduce((sum, sign) => sum + Number(sign === 0), 0);
  return open(a) === 0 ? open(b) === 0 : a.every((sign, u) => sign === b[u]);
}
