import { atomName, symbolOf } from "../chem/elements.ts";
import type { StereoUnit } from "../chem/refine.ts";
import { graphSignature, isomorphism } from "../chem/signature.ts";
import { ConfigurationComparer, fromConfiguration, toConfiguration } from "../chem/stereo.ts";
import { type Graph, makeGraph } from "../structure.ts";
import { describeChange } from "./bond-changes.ts";
import { configurationWords, differenceWords } from "./configuration-words.ts";
import {
  type ConfigurationChoice,
  type ConfigurationClass,
  configurationChoices,
  configurationClasses,
} from "./configurations.ts";
import {
  type BondKind,
  type Hands,
  type NearPairs,
  type Shape,
  sameBonds,
  seenBonds,
} from "./frame-kinds.ts";
import type { FrameRecord, FrameVerdict, MoleculeGroup } from "./frame-record.ts";
import { formulaWithDummies } from "./molecules.ts";
import { type Finding, FrameRemarks } from "./remarks.ts";
import type { IntakeMessage } from "./report.ts";
import { agrees } from "./vote.ts";

/** Bond sets for which equality of the molecule is decided exactly; beyond, by signature, for the words only. */
const EXACT_UP_TO = 200;

const OWN_ENSEMBLE = "It can become an ensemble of its own: take these frames in from a file of their own.";

/** Judges frames against the group of their ensemble. */
export class FrameJudge {
  private readonly units: StereoUnit[];
  private readonly signs: Int8Array;
  private readonly comparer: ConfigurationComparer;
  private readonly signature: string;
  /** The group as the distances show it. */
  private readonly seen: Graph;
  private readonly remarks: FrameRemarks;
  private readonly sameAtoms = new Remembered((shape: Shape) => sameComposition(shape, this.group));
  private readonly sameBonds = new Remembered((kind: BondKind) => this.hasBonds(kind));
  private readonly sameMolecule = new Remembered((kind: BondKind) => this.isSameMolecule(kind));
  private readonly bondWords = new Remembered((kind: BondKind) => this.otherBonds(kind, null));
  private readonly handWords = new Remembered((hands: Hands) => this.otherHands(hands));
  /** The pattern that stands for the configuration of a frame's hands. */
  private readonly classSigns = new Map<Hands, Int8Array>();
  private exactTests = 0;

  constructor(
    private readonly group: MoleculeGroup,
    private readonly graph: Graph,
    records: readonly FrameRecord[],
  ) {
    const { units, signs } = fromConfiguration(graph, group.configuration);
    this.units = units;
    this.signs = signs;
    this.comparer = new ConfigurationComparer(graph, units);
    this.signature = graphSignature(graph);
    this.seen = group.seen ? makeGraph(graph.elements, group.seen, graph.isotopes) : graph;
    const own = records.filter((record) => record.kind && this.sameBonds.of(record.kind));
    this.remarks = new FrameRemarks(graph, units, own);
  }

  judge(record: FrameRecord): FrameVerdict {
    const reason = this.reasonToHold(record);
    if (reason) return held(record, reason);
    const remarks = this.remarks.on(record);
    return {
      frame: record.frame,
      state: remarks.length > 0 ? "remarked" : "accepted",
      reason: null,
      messages: remarks.map((remark) => toMessage(record, remark, "remark")),
    };
  }

  /** A frame that cannot be judged against anything: its atoms lie on each other. */
  static unreadable(record: FrameRecord): FrameVerdict {
    return held(record, tooClose(record));
  }

  /** Remarks on the ensemble as a whole. */
  overall(file: string): IntakeMessage[] {
    const table = this.tableDisagrees();
    const all = [...(table ? [table] : []), ...this.remarks.overall()];
    return all.map(({ code, message }) => ({ code, severity: "remark", file, message }));
  }

  private tableDisagrees(): Finding | null {
    if (this.seen === this.graph) return null;
    const { words } = describeChange(this.graph, this.seen);
    const message = `By the distances ${words}, in most frames; the bonds of the file's table count.`;
    return { code: "S26", message };
  }

  hasOrder({ elements, isotopes }: Shape): boolean {
    const group = this.group;
    return (
      elements.length === group.elements.length &&
      elements.every((z, a) => z === group.elements[a]) &&
      isotopes.every((mass, a) => mass === group.isotopes[a])
    );
  }

  private reasonToHold(record: FrameRecord): Finding | null {
    const { kind } = record;
    if (!kind) return tooClose(record);
    if (!this.sameAtoms.of(record.shape)) return this.otherComposition(record.shape);
    const charge = this.otherCharge(record);
    if (charge) return charge;
    if (this.sameBonds.of(kind)) return record.hands && this.handWords.of(record.hands);
    // Words that name distances are this frame's own; the rest is the same for all with these bonds.
    return record.near ? this.otherBonds(kind, record.near) : this.bondWords.of(kind);
  }

  private otherComposition({ elements, isotopes }: Shape): Finding {
    const ensemble = formulaWithDummies(this.group.elements, this.group.isotopes);
    return {
      code: "X12",
      reason: "other-composition",
      message: `Another composition: ${formulaWithDummies(elements, isotopes)}, where the ensemble is ${ensemble}.`,
      hint: OWN_ENSEMBLE,
    };
  }

  private otherCharge(record: FrameRecord): Finding | null {
    const keys = ["charge", "multiplicity"] as const;
    const key = keys.find((one) => !agrees(record[one], this.group[one]));
    if (!key) return null;
    const value = (of: number | null): string => (key === "charge" ? signed(of ?? 0) : String(of));
    return {
      code: "X37",
      reason: "other-composition",
      message: `Another ${key}: ${value(record[key])}, where the ensemble has ${value(this.group[key])}.`,
      hint: OWN_ENSEMBLE,
    };
  }

  /** The bonds of the file's table, where both have one, and what the distances show. */
  private hasBonds(kind: BondKind): boolean {
    if (!this.hasOrder(kind.shape)) return false;
    // Distances that bear out the group's table need not look like frames whose distances do not.
    if (kind.seen === null && this.hasGroupBonds(kind)) return true;
    if (!this.looksAlike(kind)) return false;
    if (kind.table === null || kind.seen === null) return true;
    return this.hasGroupBonds(kind);
  }

  private hasGroupBonds({ graph }: BondKind): boolean {
    return sameBonds(graph.bonds, this.group.bonds, this.group.bonds.length / 2);
  }

  private looksAlike(kind: BondKind): boolean {
    return sameBonds(seenBonds(kind), this.seen.bonds, this.seen.bonds.length / 2);
  }

  private isSameMolecule({ graph }: BondKind): boolean {
    if (graphSignature(graph) !== this.signature) return false;
    this.exactTests += 1;
    return this.exactTests > EXACT_UP_TO || isomorphism(this.graph, graph) !== null;
  }

  private otherBonds(kind: BondKind, near: NearPairs | null): Finding {
    const belied = kind.seen !== null && this.hasOrder(kind.shape) && !this.looksAlike(kind);
    // The same graph under other numbers is the same molecule, whichever bonds seem to have moved.
    if (!belied && this.sameMolecule.of(kind)) return this.otherOrder(kind);
    if (!this.hasOrder(kind.shape)) return otherIsomer;
    const { elements, isotopes } = kind.graph;
    const change = describeChange(
      belied ? this.seen : this.graph,
      belied ? makeGraph(elements, seenBonds(kind), isotopes) : kind.graph,
      (i, j) => near?.pairs.find((pair) => pair.i === i && pair.j === j)?.ratio ?? null,
    );
    return {
      code: "X38",
      reason: "other-species",
      message: `Another species (${change.kind}): ${change.words}.${belied ? " Its bond table does not show it." : ""}`,
      hint: OWN_ENSEMBLE,
    };
  }

  private otherOrder(kind: BondKind): Finding {
    return {
      code: "X13",
      reason: "other-order",
      message: `The same molecule with its atoms in another order: ${this.orderInWords(kind)}.`,
      hint: "Write all frames in one order of atoms and take the file in again.",
    };
  }

  private orderInWords({ shape, graph }: BondKind): string {
    const { elements } = this.group;
    const at = shape.elements.findIndex((z, a) => z !== elements[a]);
    if (at >= 0) {
      return `atom ${at + 1} is ${symbolOf(shape.elements[at]!)}, in the ensemble ${symbolOf(elements[at]!)}`;
    }
    const change = describeChange(this.graph, graph);
    if (Math.max(change.broken, change.formed) > 2) return "elements stand in the same places, bonds do not";
    const exchanged = "equal atoms are exchanged";
    return change.words === "" ? exchanged : `${change.words}, and ${exchanged}`;
  }

  private otherHands(hands: Hands): Finding | null {
    const signs = this.classSigns.get(hands) ?? this.remarks.signsOf(hands);
    if (this.comparer.same(this.signs, signs)) return null;
    const { units, message } = this.differenceOf(signs);
    return { code: "X40", reason: "other-configuration", message, hint: this.hintFor(units) };
  }

  /** Units that tell a configuration from the group's, and the difference in words. */
  private differenceOf(signs: Int8Array): { units: readonly number[]; message: string } {
    const mirror = this.signs.map((sign, u) => (this.units[u]!.kind === "centre" ? -sign : sign));
    const isMirror = this.comparer.same(mirror, signs);
    // In the mirror image every centre is inverted, and naming fewer would mislead.
    const different = isMirror
      ? this.units.flatMap((unit, u) => (unit.kind === "centre" && signs[u] !== 0 ? [u] : []))
      : this.comparer.difference(this.signs, signs);
    if (isMirror) {
      return {
        units: different,
        message: configurationWords(this.graph, this.units, different, signs, true),
      };
    }
    // Frames of one configuration are told in the same words, whichever of equivalent atoms is the turned one in each.
    const sets = this.comparer.turns(this.signs, signs);
    const words = (sets.length > 0 ? sets : [different]).map((set) => {
      const turned = sets.length > 0 ? this.signs.map((sign, u) => (set.includes(u) ? -sign : sign)) : signs;
      return { set, turned };
    });
    return { units: different, message: differenceWords(this.graph, this.units, words) };
  }

  /** The configurations in which the frames hold the group's molecule, its own first. */
  configurationsIn(records: readonly FrameRecord[]): ConfigurationClass[] {
    const frames = new Map<Hands, number[]>();
    for (const record of records) {
      const { hands } = record;
      if (hands === null || !this.isGroupBonded(record)) continue;
      const known = frames.get(hands);
      if (known) known.push(record.frame);
      else frames.set(hands, [record.frame]);
    }
    const found = [...frames].map(([hands, own]) => ({ signs: this.remarks.signsOf(hands), frames: own }));
    const classes = configurationClasses(this.comparer, this.signs, found);
    const signsOf = new Map(classes.flatMap((one) => one.frames.map((frame) => [frame, one.signs] as const)));
    for (const [hands, [first]] of frames) {
      const signs = signsOf.get(first ?? 0);
      if (signs) this.classSigns.set(hands, signs);
    }
    return classes;
  }

  /** The same as a choice; none where there is but one. */
  choicesOf(classes: readonly ConfigurationClass[]): ConfigurationChoice[] {
    return configurationChoices(this.graph, this.units, classes, (signs) => this.differenceOf(signs));
  }

  /** The group with another configuration of its molecule. */
  groupWith(signs: Int8Array): MoleculeGroup {
    return { ...this.group, configuration: toConfiguration(this.units, signs) };
  }

  /** The frame's bonds, and composition and charge, are the group's. */
  private isGroupBonded(record: FrameRecord): boolean {
    const { kind, shape } = record;
    if (kind === null || !this.sameAtoms.of(shape)) return false;
    return this.otherCharge(record) === null && this.sameBonds.of(kind);
  }

  /** An NH+ or =NH turns over by way of its hydrogen: said beside the way out, which is the same for all. */
  private hintFor(different: readonly number[]): string {
    const { offsets, neighbours, elements } = this.graph;
    const withHydrogen = different
      .flatMap((u) => {
        const unit = this.units[u]!;
        return unit.kind === "centre" ? [unit.atom] : unit.atoms;
      })
      .find(
        (atom) =>
          elements[atom] === 7 &&
          neighbours.subarray(offsets[atom]!, offsets[atom + 1]!).some((b) => elements[b] === 1),
      );
    if (withHydrogen === undefined) return OWN_ENSEMBLE;
    const name = atomName(elements, withHydrogen);
    return `${name} carries a hydrogen and inverts when that comes off and on; the frames here do not show it. ${OWN_ENSEMBLE}`;
  }
}

/** A function that works out each answer once. */
class Remembered<K, V> {
  private readonly known = new Map<K, { value: V }>();

  constructor(private readonly find: (key: K) => V) {}

  of(key: K): V {
    let entry = this.known.get(key);
    if (!entry) {
      entry = { value: this.find(key) };
      this.known.set(key, entry);
    }
    return entry.value;
  }
}

const otherIsomer: Finding = {
  code: "X38",
  reason: "other-species",
  message: "Another species: the same composition, but other bonds, and another order of atoms.",
  hint: OWN_ENSEMBLE,
};

function tooClose({ shape, closest, allZero }: FrameRecord): Finding {
  if (allZero || !closest) {
    const hint = "The frame holds no geometry.";
    return { code: "X28", reason: "unreadable", message: "All coordinates are zero.", hint };
  }
  const pair = [closest.i, closest.j].map((atom) => atomName(shape.elements, atom)).join(" and ");
  return {
    code: "X28",
    reason: "unreadable",
    message: `${pair} are ${closest.distance.toFixed(2)} Å apart; no two atoms come nearer than 0.5 Å.`,
    hint: "Look whether the calculation failed, or whether lengths are in nanometres.",
  };
}

function held(record: FrameRecord, finding: Finding): FrameVerdict {
  return {
    frame: record.frame,
    state: "held",
    reason: finding.reason ?? "unclear",
    messages: [toMessage(record, finding, "hold")],
  };
}

function toMessage(
  { file, line, frame }: FrameRecord,
  { code, message, hint }: Finding,
  severity: "hold" | "remark",
): IntakeMessage {
  return { code, severity, file, line, frame, message, ...(hint && { hint }) };
}

function sameComposition({ elements, isotopes }: Shape, group: MoleculeGroup): boolean {
  if (elements.length !== group.elements.length) return false;
  const sorted = (z: ArrayLike<number>, mass: ArrayLike<number>): string =>
    Array.from({ length: z.length }, (_, a) => z[a]! * 512 + mass[a]!)
      .sort((x, y) => x - y)
      .join();
  return sorted(elements, isotopes) === sorted(group.elements, group.isotopes);
}

function signed(charge: number): string {
  return charge === 0 ? "0" : charge > 0 ? `+${charge}` : `−${-charge}`;
}
