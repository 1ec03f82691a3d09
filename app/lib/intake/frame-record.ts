import type { Configuration } from "../chem/stereo.ts";
import type { StatedOrders } from "../sdf/orders.ts";
import type { FrameTrace } from "./frame-kinds.ts";
import type { FrameState, HoldReason, IntakeMessage } from "./report.ts";

/** One frame as the reader gives it; arrays are looked at during the call only. */
export interface ClassifierFrame {
  /** From 1. */
  frame: number;
  file: string;
  /** Its count line. */
  line: number;
  elements: Uint8Array;
  /** Null where the file gives none. */
  isotopes: Uint16Array | null;
  /** Å, packed. */
  positions: Float64Array;
  /** Null is unknown, not 0. */
  charge?: number | null;
  multiplicity?: number | null;
  /** The frame's energy as written (or the whole comment line): copies have to agree in it too. */
  energy?: string | null;
  /** Bonds as the file states them; they count, and the distances only have to agree. Kept, not copied. */
  table?: StatedOrders | null;
  /** False where a frame in another order of atoms is to stay as it is. */
  map?: boolean;
}

/** What the frames of an ensemble have in common. Plain JSON, so that a later batch is compared with the same. */
export interface MoleculeGroup {
  elements: number[];
  /** Mass numbers, 0 where none is given. */
  isotopes: number[];
  /** Flat pairs i < j, sorted: of the file's bond table, else as the distances show them. */
  bonds: number[];
  /** What the distances show, where that is not what the file's bond table says. */
  seen?: number[];
  charge: number | null;
  multiplicity: number | null;
  configuration: Configuration;
}

export interface FrameVerdict {
  frame: number;
  state: FrameState;
  /** Set where the frame is held. */
  reason: HoldReason | null;
  /** The reason in words, or the remarks. */
  messages: IntakeMessage[];
}

/** What the streaming pass keeps of a frame. */
export interface FrameRecord extends FrameTrace {
  frame: number;
  file: string;
  line: number;
  charge: number | null;
  multiplicity: number | null;
  copyOf: number | null;
  /** Which atom of the file stands at each place, where the frame was put into the group's order. */
  mapping: Int32Array | null;
  withEnergy: boolean;
}
