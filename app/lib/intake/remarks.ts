import { inWords } from "../chem/chirality.ts";
import { atomName } from "../chem/elements.ts";
import { hillFormula } from "../chem/formula.ts";
import type { StereoUnit } from "../chem/refine.ts";
import { fragmentsOf } from "../chem/rings.ts";
import type { Graph } from "../structure.ts";
import { undefinedWords } from "./configuration-words.ts";
import type { BondKind, Hands, NearPairs } from "./frame-kinds.ts";
import type { FrameRecord } from "./frame-record.ts";
import type { HoldReason } from "./report.ts";

/** A reason to hold or to remark, without its place. */
export interface Finding {
  code: string;
  message: string;
  hint?: string;
  /** Set where the frame is to be held. */
  reason?: HoldReason;
}

/** So many contested distances of a frame are named. */
const NAMED = 3;

/** What is to be said of frames that belong to the group. */
export class FrameRemarks {
  /** Contested pairs of most frames, said once for all. */
  private readonly usual = new Set<number>();
  /** Where the group's units stand among those of a bond kind, which also counts bonds that are not double. */
  private readonly places = new Map<BondKind, number[]>();
  private readonly open = new Map<Hands, Finding | null>();

  /** @param own records of the frames that have the group's bonds */
  constructor(
    private readonly graph: Graph,
    private readonly units: readonly StereoUnit[],
    own: readonly FrameRecord[],
  ) {
    this.findUsualPairs(own);
  }

  /** The frame's signs of the group's units. */
  signsOf(hands: Hands): Int8Array {
    let places = this.places.get(hands.kind);
    if (!places) {
      const all = hands.kind.units ?? [];
      places = this.units.map((unit) => all.findIndex((other) => samePlace(unit, other)));
      this.places.set(hands.kind, places);
    }
    return Int8Array.from(places, (place) => (place < 0 ? 0 : hands.signs[place]!));
  }

  on(record: FrameRecord): Finding[] {
    const remarks: Finding[] = [];
    if (record.copyOf !== null) {
      const what = record.withEnergy ? "coordinates and energy" : "coordinates";
      const message = `Exact copy: the same ${what} as frame ${record.copyOf}, to the last digit.`;
      remarks.push({ code: "X42", message });
    }
    if (record.drawing) {
      const message = "All z are zero though the molecule is not flat: it looks like a drawing.";
      remarks.push({ code: "X29", message });
    }
    if (record.mapping !== null) remarks.push(this.mapped(record.mapping, record.kind?.table != null));
    const open = record.hands ? this.openHands(record.hands) : this.notCompared();
    if (open) remarks.push(open);
    const near = record.near && this.nearInWords(record.near);
    if (near) remarks.push({ code: "X41", message: near });
    return remarks;
  }

  /** The atoms stood in another order and were put into the group's (rows X13, S22). */
  private mapped(mapping: Int32Array, inSdf: boolean): Finding {
    const moved = [...mapping].flatMap((file, atom) => (file === atom ? [] : [{ file, atom }]));
    const named = moved
      .slice(0, NAMED)
      .map(({ file, atom }) => `${this.name(atom)} is atom ${file + 1} of the file`);
    const rest = moved.length > NAMED ? `; and ${moved.length - NAMED} more` : "";
    return {
      code: inSdf ? "S22" : "X13",
      message: `Another order of atoms, mapped by the bonds: ${named.join(", ")}${rest}.`,
      hint: "The whole mapping goes along into exports.",
    };
  }

  overall(): Finding[] {
    return [this.fragments(), this.usualPairs()].filter((finding) => finding !== null);
  }

  private openHands(hands: Hands): Finding | null {
    let finding = this.open.get(hands);
    if (finding === undefined) {
      const signs = this.signsOf(hands);
      const open = this.units.flatMap((_, u) => (signs[u] === 0 ? [u] : []));
      const message = open.length > 0 ? undefinedWords(this.graph, this.units, open) : "";
      finding = message ? { code: "X40", message } : null;
      this.open.set(hands, finding);
    }
    return finding;
  }

  /** Hands are kept for the first bond sets only; a file with thousands of them is no ensemble. */
  private notCompared(): Finding | null {
    if (this.units.length === 0) return null;
    const message = "The configuration was not compared: too many molecules came before in these files.";
    return { code: "X40", message };
  }

  private nearInWords(near: NearPairs): string | null {
    const shared = near.shared.map(({ h, kept, other }) => {
      const [proton, nearer, farther] = [h, kept, other].map((atom) => this.name(atom));
      return `${proton} is shared between ${nearer} and ${farther}, and kept at ${nearer}, the nearer`;
    });
    const told = new Set(near.shared.map(({ h, other }) => this.key(h, other)));
    const contested = near.pairs
      .filter(({ i, j }) => !this.usual.has(this.key(i, j)) && !told.has(this.key(i, j)))
      .map(({ i, j, ratio }) => {
        const [a, b] = this.heavierFirst(i, j).map((atom) => this.name(atom));
        return `${a} to ${b} at ${ratio.toFixed(2)} of the summed radii: not bonded, but near`;
      });
    const all = [...shared, ...contested];
    if (all.length === 0) return null;
    const rest = all.length - NAMED;
    return `${all.slice(0, NAMED).join("; ")}${rest > 0 ? `; and ${rest} more` : ""}.`;
  }

  private findUsualPairs(own: readonly FrameRecord[]): void {
    const counts = new Map<number, number>();
    for (const { near } of own) {
      for (const { i, j } of near?.pairs ?? []) {
        counts.set(this.key(i, j), (counts.get(this.key(i, j)) ?? 0) + 1);
      }
    }
    // Two frames have no custom yet: there the remark stays with the frame.
    if (own.length < 3) return;
    for (const [key, count] of counts) if (2 * count > own.length) this.usual.add(key);
  }

  private usualPairs(): Finding | null {
    if (this.usual.size === 0) return null;
    const n = this.graph.elements.length;
    const names = [...this.usual]
      .sort((a, b) => a - b)
      .map((key) =>
        this.heavierFirst(Math.floor(key / n), key % n)
          .map((atom) => this.name(atom))
          .join(" to "),
      );
    const verb = names.length > 1 ? "are" : "is";
    return { code: "X41", message: `${inWords(names)} ${verb} near, but not bonded, in most frames.` };
  }

  private fragments(): Finding | null {
    const { elements, isotopes } = this.graph;
    const fragment = fragmentsOf(this.graph);
    const count = Math.max(-1, ...fragment) + 1;
    if (count < 2) return null;
    const formulas = new Map<string, number>();
    for (let f = 0; f < count; f++) {
      const inIt = (_: number, a: number): boolean => fragment[a] === f;
      const formula = hillFormula(elements.filter(inIt), isotopes.filter(inIt));
      formulas.set(formula, (formulas.get(formula) ?? 0) + 1);
    }
    const names = [...formulas].map(([formula, times]) => (times > 1 ? `${times} ${formula}` : formula));
    return { code: "X39", message: `Every frame holds ${count} separate fragments: ${inWords(names)}.` };
  }

  private name(atom: number): string {
    return atomName(this.graph.elements, atom);
  }

  private heavierFirst(i: number, j: number): [number, number] {
    return this.graph.elements[j]! > this.graph.elements[i]! ? [j, i] : [i, j];
  }

  private key(i: number, j: number): number {
    return Math.min(i, j) * this.graph.elements.length + Math.max(i, j);
  }
}

function samePlace(a: StereoUnit, b: StereoUnit): boolean {
  if (a.kind === "centre") {
    return b.kind === "centre" && a.atom === b.atom && a.neighbours.join() === b.neighbours.join();
  }
  return b.kind === "double-bond" && a.atoms[0] === b.atoms[0] && a.atoms[1] === b.atoms[1];
}
