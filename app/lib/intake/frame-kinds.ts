import { BondFinder } from "../chem/bonds.ts";
import { fold, type StereoUnit } from "../chem/refine.ts";
import { fragmentsOf } from "../chem/rings.ts";
import { unitSign } from "../chem/stereo.ts";
import { findStereoUnits } from "../chem/stereo-units.ts";
import { AROMATIC } from "../sdf/bond-types.ts";
import type { StatedOrders } from "../sdf/orders.ts";
import { type Graph, makeGraph } from "../structure.ts";

/**
 * What intake keeps of the frames as they stream by: which elements, which bonds and which hands each has, as numbers
 * of shared tables. No coordinates stay.
 */

/** One sequence of elements and isotopes. */
export interface Shape {
  id: number;
  elements: Uint8Array;
  isotopes: Uint16Array;
  /** Equal for shapes of one composition, whatever their order; dummies count. */
  composition: string;
  frames: number;
  kinds: BondKind[];
}

/** One set of bonds of a shape. */
export interface BondKind {
  shape: Shape;
  /** The bonds of the file's table where there is one, else those that the distances show. */
  graph: Graph;
  /** What the distances show, where that is not what the table says. */
  seen: Int32Array | null;
  /** The table of a first frame of this kind; null where the file has none. */
  table: StatedOrders | null;
  /** Null where so many bond sets came before that hands are no longer kept (`HANDS_UP_TO`). */
  units: StereoUnit[] | null;
  /** Sums of the lengths of the units that may be double bonds, and the number of frames in them. */
  lengths: Float64Array;
  counted: number;
  hands: Hands[];
  handsByKey: Map<string, Hands>;
}

/** One pattern of signs of the units of a bond kind. */
export interface Hands {
  kind: BondKind;
  signs: Int8Array;
}

/** Pairs in the contested band, with distance over summed radii; and shared protons. */
export interface NearPairs {
  pairs: { i: number; j: number; ratio: number }[];
  shared: { h: number; kept: number; other: number }[];
}

/** What is kept of one frame. */
export interface FrameTrace {
  shape: Shape;
  /** Null where atoms are too close for bonds to mean anything. */
  kind: BondKind | null;
  hands: Hands | null;
  near: NearPairs | null;
  closest: { i: number; j: number; distance: number } | null;
  allZero: boolean;
  drawing: boolean;
}

/** Bond sets for which hands are kept; a file with more is no ensemble of one molecule. */
const HANDS_UP_TO = 2000;
/** Bond finders kept at hand; each holds buffers of the size of its molecule. */
const FINDERS = 8;

/** Sorts frames into shapes, bond kinds and hands in one pass. */
export class FrameKinds {
  readonly shapes: Shape[] = [];
  private readonly shapesByKey = new Map<string, Shape>();
  private readonly kindsByHash = new Map<number, BondKind[]>();
  private readonly finders = new Map<Shape, BondFinder>();
  private kindCount = 0;
  private last: { shape: Shape; elements: Uint8Array; isotopes: Uint16Array | null } | null = null;
  private lastKind: BondKind | null = null;
  private lastTable: StatedOrders["bonds"] | null = null;
  private scratch = new Int8Array(0);

  /**
   * @param positions Å, packed; read during the call only
   * @param table bonds as the file states them; kept
   */
  trace(
    elements: Uint8Array,
    isotopes: Uint16Array | null,
    positions: Float64Array,
    table: StatedOrders | null = null,
  ): FrameTrace {
    const shape = this.shapeOf(elements, isotopes);
    shape.frames += 1;
    const finder = this.finderOf(shape);
    finder.find(positions);
    const trace: FrameTrace = {
      shape,
      kind: null,
      hands: null,
      near: null,
      closest: null,
      allZero: false,
      drawing: false,
    };
    if (finder.closestDistance < Infinity) {
      trace.closest = { i: finder.closestI, j: finder.closestJ, distance: finder.closestDistance };
      trace.allZero = positions.every((x) => x === 0);
      return trace;
    }
    const kind = this.kindOf(shape, finder, table);
    trace.kind = kind;
    trace.hands = this.handsOf(kind, positions);
    trace.near = nearPairs(finder);
    trace.drawing = isFlatInZ(positions) && !canBeFlat(kind.graph);
    return trace;
  }

  private shapeOf(elements: Uint8Array, isotopes: Uint16Array | null): Shape {
    // A reader that gives frames of one molecule the same array spares the comparison.
    if (this.last?.elements === elements && this.last.isotopes === isotopes) return this.last.shape;
    const marked = isotopes?.some((mass) => mass !== 0) ? isotopes : null;
    const key = `${elements.join()}|${marked?.join() ?? ""}`;
    let shape = this.shapesByKey.get(key);
    if (!shape) {
      shape = {
        id: this.shapes.length,
        elements: elements.slice(),
        isotopes: marked?.slice() ?? new Uint16Array(elements.length),
        composition: compositionKey(elements, marked),
        frames: 0,
        kinds: [],
      };
      this.shapes.push(shape);
      this.shapesByKey.set(key, shape);
    }
    this.last = { shape, elements, isotopes };
    return shape;
  }

  private finderOf(shape: Shape): BondFinder {
    let finder = this.finders.get(shape);
    if (finder) return finder;
    finder = new BondFinder(shape.elements);
    const oldest = this.finders.keys().next().value;
    if (this.finders.size >= FINDERS && oldest) this.finders.delete(oldest);
    this.finders.set(shape, finder);
    return finder;
  }

  /** Takes back a frame that is to be traced again in another order of its atoms. */
  takeBack(trace: FrameTrace): void {
    trace.shape.frames -= 1;
  }

  private kindOf(shape: Shape, finder: BondFinder, table: StatedOrders | null): BondKind {
    const { bonds, bondCount } = finder;
    const last = this.lastKind;
    const sameTable = (table?.bonds ?? null) === this.lastTable;
    if (last && sameTable && last.shape === shape && sameBonds(seenBonds(last), bonds, bondCount)) {
      return withTable(last, table);
    }
    const own = table === null ? bonds.slice(0, 2 * bondCount) : tableBonds(table, bonds, bondCount);
    const fits = (kind: BondKind): boolean =>
      kind.shape === shape &&
      (kind.table === null) === (table === null) &&
      sameBonds(seenBonds(kind), bonds, bondCount) &&
      sameBonds(kind.graph.bonds, own, own.length / 2);
    let hash = fold(19, shape.id);
    for (let k = 0; k < 2 * bondCount; k++) hash = fold(hash, bonds[k]!);
    const sameHash = this.kindsByHash.get(hash) ?? [];
    let kind = sameHash.find(fits);
    if (!kind) {
      kind = newKind(shape, own, this.kindCount < HANDS_UP_TO);
      if (!sameBonds(own, bonds, bondCount)) kind.seen = bonds.slice(0, 2 * bondCount);
      this.kindCount += 1;
      this.kindsByHash.set(hash, [...sameHash, kind]);
      shape.kinds.push(kind);
    }
    this.lastKind = kind;
    this.lastTable = table?.bonds ?? null;
    return withTable(kind, table);
  }

  private handsOf(kind: BondKind, positions: Float64Array): Hands | null {
    const { units, lengths } = kind;
    if (!units) return null;
    if (this.scratch.length < units.length) this.scratch = new Int8Array(2 * units.length);
    const signs = this.scratch;
    for (let u = 0; u < units.length; u++) {
      const unit = units[u]!;
      signs[u] = unitSign(unit, positions);
      if (unit.kind === "double-bond") lengths[u]! += distance(positions, unit.atoms[0], unit.atoms[1]);
    }
    kind.counted += 1;
    const latest = kind.hands[kind.hands.length - 1];
    if (latest && equalSigns(latest.signs, signs)) return latest;
    const own = signs.slice(0, units.length);
    const key = own.join("");
    let hands = kind.handsByKey.get(key);
    if (!hands) {
      hands = { kind, signs: own };
      kind.hands.push(hands);
      kind.handsByKey.set(key, hands);
    }
    return hands;
  }
}

/** Bonds of a kind as the distances show them. */
export function seenBonds(kind: BondKind): Int32Array {
  return kind.seen ?? kind.graph.bonds;
}

/** Whether a list of pairs is the first `count` pairs of another. */
export function sameBonds(own: ArrayLike<number>, bonds: ArrayLike<number>, count: number): boolean {
  if (own.length !== 2 * count) return false;
  for (let k = 0; k < own.length; k++) if (own[k] !== bonds[k]) return false;
  return true;
}

/** The first table that states orders stands for all of a kind. */
function withTable(kind: BondKind, table: StatedOrders | null): BondKind {
  if (table !== null && (kind.table === null || (kind.table.orders === null && table.orders !== null))) {
    kind.table = table;
  }
  return kind;
}

/** A table's bonds; what it calls coordination or hydrogen bonds only where the distances show them too. */
function tableBonds(table: StatedOrders, seen: Int32Array, count: number): Int32Array {
  const { bonds, orders } = table;
  if (orders === null) return Int32Array.from(bonds);
  const shown = new Set<string>();
  for (let k = 0; k < count; k++) shown.add(`${seen[2 * k]} ${seen[2 * k + 1]}`);
  const kept: number[] = [];
  for (let k = 0; k < orders.length; k++) {
    const [i, j] = [bonds[2 * k]!, bonds[2 * k + 1]!];
    if (orders[k]! <= AROMATIC || shown.has(`${i} ${j}`)) kept.push(i, j);
  }
  return Int32Array.from(kept);
}

function newKind(shape: Shape, bonds: Int32Array, withHands: boolean): BondKind {
  const graph = makeGraph(shape.elements, bonds, shape.isotopes);
  const units = withHands ? findStereoUnits(graph) : null;
  return {
    shape,
    graph,
    seen: null,
    table: null,
    units,
    lengths: new Float64Array(units?.length ?? 0),
    counted: 0,
    hands: [],
    handsByKey: new Map(),
  };
}

function compositionKey(elements: Uint8Array, isotopes: Uint16Array | null): string {
  const counts = new Map<number, number>();
  elements.forEach((z, a) => {
    const kind = z * 512 + (isotopes?.[a] ?? 0);
    counts.set(kind, (counts.get(kind) ?? 0) + 1);
  });
  return [...counts]
    .sort(([a], [b]) => a - b)
    .map((entry) => entry.join("x"))
    .join();
}

function nearPairs(finder: BondFinder): NearPairs | null {
  if (finder.contestedCount === 0 && finder.sharedCount === 0) return null;
  const near: NearPairs = { pairs: [], shared: [] };
  for (let k = 0; k < finder.contestedCount; k++) {
    const i = finder.contested[2 * k]!;
    const j = finder.contested[2 * k + 1]!;
    near.pairs.push({ i, j, ratio: finder.ratio(i, j) });
  }
  for (let k = 0; k < finder.sharedCount; k++) {
    const [h, kept, other] = finder.shared.subarray(3 * k, 3 * k + 3);
    near.shared.push({ h: h!, kept: kept!, other: other! });
  }
  return near;
}

function isFlatInZ(positions: Float64Array): boolean {
  for (let k = 2; k < positions.length; k += 3) if (positions[k] !== 0) return false;
  return true;
}

/**
 * Whether a molecule of these atoms can lie in a plane: no atom with four neighbours, and no more end atoms than flat
 * atoms with three neighbours (two at oxygen and sulfur) leave room for.
 */
function canBeFlat(graph: Graph): boolean {
  let room = 2 * (Math.max(-1, ...fragmentsOf(graph)) + 1);
  let ends = 0;
  let heavy = 0;
  for (let a = 0; a < graph.elements.length; a++) {
    if (graph.offsets[a + 1]! - graph.offsets[a]! >= 4) return false;
    const z = graph.elements[a]!;
    if (z === 0) continue;
    if (z === 1 || z === 9 || z === 17 || z === 35 || z === 53) ends += 1;
    else {
      heavy += 1;
      room += (z === 8 || z === 16 ? 2 : 3) - 2;
    }
  }
  return heavy === 0 || ends <= room;
}

function distance(positions: Float64Array, a: number, b: number): number {
  const x = positions[3 * a]! - positions[3 * b]!;
  const y = positions[3 * a + 1]! - positions[3 * b + 1]!;
  const z = positions[3 * a + 2]! - positions[3 * b + 2]!;
  return Math.sqrt(x * x + y * y + z * z);
}

function equalSigns(own: Int8Array, signs: Int8Array): boolean {
  for (let u = 0; u < own.length; u++) if (own[u] !== signs[u]) return false;
  return true;
}
