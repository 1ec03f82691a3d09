import { perceiveChirality } from "../chem/chirality.ts";
import { hillFormula } from "../chem/formula.ts";
import type { Configuration } from "../chem/stereo.ts";
import { type Graph, makeGraph } from "../structure.ts";
import { CopyFinder } from "./copies.ts";
import { FrameKinds } from "./frame-kinds.ts";
import type { ClassifierFrame, FrameRecord, FrameVerdict, MoleculeGroup } from "./frame-record.ts";
import { FrameJudge } from "./judge.ts";
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
}

/**
 * Sorts the frames of an upload into one ensemble and what does not belong to it, in one pass that keeps no
 * coordinates.
 *
 * The ensemble is the largest composition (with its charge), in it the most frequent order of atoms, set of bonds and
 * configuration; ties go to the earliest frame. Frames that differ are held with the difference in words: rows X12,
 * X13, X28, X29, X37 to X40 of the formats, and two of our own: X41 a contested distance, X42 an exact copy.
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

  constructor(options: { group?: MoleculeGroup | null } = {}) {
    this.given = options.group ?? null;
  }

  /**
   * Takes in the next frame.
   *
   * @returns a number for its sequence of elements and isotopes, from 0 in order of appearance, and the frame's index
   *   among those of the same sequence: the place for its coordinates
   * @throws RangeError on a frame without atoms, or with another number of coordinates than atoms
   */
  add(frame: ClassifierFrame): { shape: number; indexInShape: number } {
    const atoms = frame.elements.length;
    if (atoms === 0 || frame.positions.length !== 3 * atoms) {
      throw new RangeError(`Frame ${frame.frame}: ${frame.positions.length} coordinates for ${atoms} atoms.`);
    }
    const trace = this.kinds.trace(frame.elements, frame.isotopes, frame.positions);
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
      copyOf: this.copies.find(frame.frame, trace.shape.id, frame.positions, energy),
      withEnergy: energy !== null,
    });
    return { shape: trace.shape.id, indexInShape: trace.shape.frames - 1 };
  }

  /**
   * Decides what the ensemble is and judges every frame against it. May be called more than once.
   *
   * @param options.preferFrames frames that decide alone, where a person picks another group
   */
  finish(options: { preferFrames?: readonly number[] } = {}): Classification {
    const preferred = new Set(options.preferFrames);
    const usable = this.records.filter((record) => record.kind !== null);
    const voters = usable.filter((record) => preferred.has(record.frame));
    const group = this.given ?? chooseGroup(voters.length > 0 ? voters : usable);
    if (!group) return nothing(this.records);
    const graph = graphOf(group);
    const judge = new FrameJudge(group, graph, this.records);
    return {
      frames: this.records.map((record) => judge.judge(record)),
      group,
      graph,
      formula: hillFormula(group.elements, group.isotopes),
      shape: this.kinds.shapes.find((shape) => judge.hasOrder(shape))?.id ?? null,
      ...chirality(graph, group.configuration),
      messages: judge.overall(this.records[0]?.file ?? ""),
    };
  }
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
  };
}
