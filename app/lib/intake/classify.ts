import { perceiveChirality } from "../chem/chirality.ts";
import { hillFormula } from "../chem/formula.ts";
import type { Configuration } from "../chem/stereo.ts";
import { type StatedOrders, statedOrders } from "../sdf/orders.ts";
import { type Graph, makeGraph } from "../structure.ts";
import type { ConfigurationChoice, ConfigurationClass } from "./configurations.ts";
import { CopyFinder } from "./copies.ts";
import { FrameKinds } from "./frame-kinds.ts";
import type { ClassifierFrame, FrameRecord, FrameVerdict, MoleculeGroup } from "./frame-record.ts";
import { FrameJudge } from "./judge.ts";
import { moleculeKeys, moleculesOf } from "./molecules.ts";
import { OrderMapper } from "./order-mapper.ts";
import type { MoleculeChoice } from "./reading-questions.ts";
import type { IntakeMessage } from "./report.ts";
import { chooseGroup } from "./vote.ts";

export interface Classification {
  /** In the order of the calls of `add`. */
  frames: FrameVerdict[];
  /** Null when no frame can be used. */
  group: MoleculeGroup | null;
  graph: Graph | null;
  /** Hill formula; empty without a group. */
  formula: string;
  /** The shape that is the group's (see `add`); null when none of these frames has it. */
  shape: number | null;
  /** By the group's configuration; ask `perceiveChirality` again once the lowest frame is known. */
  chirality: "achiral" | "chiral" | "unsure";
  chiralityNote: string;
  /** On the ensemble as a whole: fragments, distances that are contested throughout. */
  messages: IntakeMessage[];
  /** The molecules that the frames show, the one with most frames first; of equal ones that met first. */
  molecules: MoleculeChoice[];
  /** The configurations in which they hold the group's molecule, the group's first; none where there is but one. */
  configurations: ConfigurationChoice[];
  /** Orders of the group's bonds, with charges and radicals, as the files state them; null where they do not. */
  table: Required<StatedOrders> | null;
}

/** Where a frame's coordinates belong, and in which order of atoms. */
export interface FramePlacing {
  /** Number of its sequence of elements and isotopes, from 0 in order of appearance. */
  shape: number;
  indexInShape: number;
  /** Å: the frame's own, or those of the group's order of atoms. */
  positions: Float64Array;
  /** Which atom of the frame stands at each place; null where it keeps its order. */
  mapping: Int32Array | null;
}

/**
 * Sorts the frames of an upload into one ensemble and what does not belong to it, in one pass that keeps no
 * coordinates.
 *
 * The ensemble is the largest composition (with its charge), in it the most frequent order of atoms, set of bonds and
 * configuration; ties go to the earliest frame. Frames that differ are held with the difference in words: rows X12,
 * X13, X28, X29, X37 to X40 and S22 of the formats, and three of our own: X41 a contested distance, X42 an exact copy,
 * S26 a bond table that the distances do not bear out.
 *
 * @example
 * const classifier = new FrameClassifier();
 * for (const frame of frames) classifier.add(frame);
 * const { frames, group } = classifier.finish();
 * const next = new FrameClassifier({ group }); // a second batch of the same molecule
 */
export class FrameClassifier {
  private readonly kinds = new FrameKinds();
  private readonly copies = new CopyFinder();
  private readonly records: FrameRecord[] = [];
  private readonly given: MoleculeGroup | null;
  private readonly mapper: OrderMapper | null;
  private readonly givenTable: StatedOrders | null;

  /**
   * @param options.group what a further batch is compared with
   * @param options.map frames of the group's molecule in another order of atoms are put into its order
   */
  constructor(options: { group?: MoleculeGroup | null; map?: boolean } = {}) {
    const group = options.group ?? null;
    this.given = group;
    this.mapper = group && options.map ? new OrderMapper(graphOf(group)) : null;
    this.givenTable = group && {
      bonds: Int32Array.from(group.bonds),
      orders: null,
      charges: null,
      radicals: null,
    };
  }

  /**
   * Takes in the next frame.
   *
   * @throws RangeError on a frame without atoms, or with another number of coordinates than atoms
   */
  add(frame: ClassifierFrame): FramePlacing {
    const atoms = frame.elements.length;
    if (atoms === 0 || frame.positions.length !== 3 * atoms) {
      throw new RangeError(`Frame ${frame.frame}: ${frame.positions.length} coordinates for ${atoms} atoms.`);
    }
    const { trace, positions, mapping } = this.trace(frame);
    const energy = frame.energy ?? null;
    const { shape, kind, hands, near, closest, allZero, drawing } = trace;
    this.records.push({
      shape,
      kind,
      hands,
      near,
      closest,
      allZero,
      drawing,
      frame: frame.frame,
      file: frame.file,
      line: frame.line,
      charge: frame.charge ?? null,
      multiplicity: frame.multiplicity ?? null,
      copyOf: this.copies.find(frame.frame, trace.shape.id, positions, energy),
      mapping,
      withEnergy: energy !== null,
    });
    return { shape: trace.shape.id, indexInShape: trace.shape.frames - 1, positions, mapping };
  }

  private trace(frame: ClassifierFrame) {
    const { elements, isotopes, positions } = frame;
    const table = frame.table ?? null;
    // A further batch without a table is read with the one that the ensemble has.
    const withSeen = table === null && this.given?.seen !== undefined && sameElements(elements, this.given);
    const trace = this.kinds.trace(elements, isotopes, positions, withSeen ? this.givenTable : table);
    const mapping = trace.kind && this.mapper && frame.map !== false ? this.mapper.mapping(trace.kind) : null;
    if (mapping === null || this.mapper === null) return { trace, positions, mapping: null };
    this.kinds.takeBack(trace);
    const own = this.mapper.graph;
    const moved = inOrder(positions, mapping);
    const stated = table === null ? null : this.givenTable;
    return { trace: this.kinds.trace(own.elements, own.isotopes, moved, stated), positions: moved, mapping };
  }

  /**
   * Decides what the ensemble is and judges every frame against it. May be called more than once.
   *
   * @param options.preferFrames frames that decide alone, where a person picks another group
   * @param options.like a frame of the molecule that a person picks: all frames of it decide
   * @param options.configuration of the group's molecule: that of a frame that a person picks, or that of most frames
   *   also where the group is given
   */
  finish(
    options: {
      preferFrames?: readonly number[];
      like?: number | null;
      configuration?: number | "most" | null;
    } = {},
  ): Classification {
    const preferred = new Set(options.preferFrames);
    const usable = this.records.filter((record) => record.kind !== null);
    const picked = usable.find((record) => record.frame === options.like);
    const keyOf = moleculeKeys(usable);
    const voters = picked
      ? usable.filter((record) => keyOf(record) === keyOf(picked))
      : usable.filter((record) => preferred.has(record.frame));
    const voted = this.given ?? chooseGroup(voters.length > 0 ? voters : usable);
    if (!voted) return nothing(this.records);
    const graph = graphOf(voted);
    const { group, judge, classes } = this.configured(voted, graph, options.configuration ?? null);
    return {
      frames: this.records.map((record) => judge.judge(record)),
      group,
      graph,
      formula: hillFormula(group.elements, group.isotopes),
      shape: this.kinds.shapes.find((shape) => judge.hasOrder(shape))?.id ?? null,
      ...chirality(graph, group.configuration),
      messages: judge.overall(this.records[0]?.file ?? ""),
      molecules: moleculesOf(usable, keyOf),
      configurations: judge.choicesOf(classes),
      table: this.tableOf(graph),
    };
  }

  /** The group in the configuration that is asked for, where frames have it. */
  private configured(voted: MoleculeGroup, graph: Graph, asked: number | "most" | null) {
    const judge = new FrameJudge(voted, graph, this.records);
    const classes = judge.configurationsIn(this.records);
    const [own, ...others] = classes;
    const [most] = others;
    const chosen =
      asked === "most"
        ? most && outnumbers(most, own) && most
        : others.find(({ frames }) => frames.includes(asked ?? 0));
    if (!chosen) return { group: voted, judge, classes };
    const group = judge.groupWith(chosen.signs);
    const again = new FrameJudge(group, graph, this.records);
    return { group, judge: again, classes: again.configurationsIn(this.records) };
  }

  private tableOf(graph: Graph): Required<StatedOrders> | null {
    for (const { table } of this.kinds.shapes.flatMap((shape) => shape.kinds)) {
      const orders = table && statedOrders(graph, table);
      if (table && orders && this.givenTable?.bonds !== table.bonds)
        return { ...table, bonds: graph.bonds, orders };
    }
    return null;
  }
}

/** A pattern with a flat centre says less than a full one, however many have it. */
function outnumbers(one: ConfigurationClass, own: ConfigurationClass | undefined): boolean {
  return !one.signs.includes(0) && one.frames.length > (own?.frames.length ?? 0);
}

function sameElements(elements: Uint8Array, group: MoleculeGroup): boolean {
  return elements.length === group.elements.length && elements.every((z, a) => z === group.elements[a]);
}

/** Coordinates with atom `mapping[a]` at place a. */
function inOrder(positions: Float64Array, mapping: Int32Array): Float64Array {
  const moved = new Float64Array(positions.length);
  mapping.forEach((from, to) => {
    moved.set(positions.subarray(3 * from, 3 * from + 3), 3 * to);
  });
  return moved;
}

/**
 * The bonded graph of a group.
 *
 * @throws RangeError where a bond names an atom that is not there
 */
export function graphOf(group: MoleculeGroup): Graph {
  return makeGraph(Uint8Array.from(group.elements), group.bonds, Uint16Array.from(group.isotopes));
}

function chirality(
  graph: Graph,
  configuration: Configuration,
): Pick<Classification, "chirality" | "chiralityNote"> {
  const { chirality, note } = perceiveChirality(graph, configuration);
  return { chirality, chiralityNote: note };
}

function nothing(records: readonly FrameRecord[]): Classification {
  return {
    frames: records.map((record) => FrameJudge.unreadable(record)),
    group: null,
    graph: null,
    formula: "",
    shape: null,
    chirality: "achiral",
    chiralityNote: "",
    messages: [],
    molecules: [],
    configurations: [],
    table: null,
  };
}
